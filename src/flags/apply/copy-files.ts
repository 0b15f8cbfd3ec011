/** Each file of a dataset copied with flags set, in the way of its format. */
import { CannotHoldFlags } from "../../dataset/cannot-hold.ts";
import type { Dataset } from "../../dataset/dataset.ts";
import { openFits } from "../../dataset/fits/hdus.ts";
import { openSource } from "../../dataset/fits/source.ts";
import { copyAddingIdiFlags } from "../../dataset/fits-idi/copy-adding-flags.ts";
import { copyFlaggingIdiWeights } from "../../dataset/fits-idi/flag-weights.ts";
import { openFitsDataset } from "../../dataset/open-fits.ts";
import { copyFlaggingWeights } from "../../dataset/random-groups/flag-weights.ts";
import { copyAddingFlags } from "../../dataset/random-groups/write-flag-table.ts";
import type { RowsOfFile } from "../../dataset/rows-of-file.ts";
import { type ByteSink, openSink } from "../../util/byte-sink.ts";
import type { OpenFile } from "../../util/new-output.ts";
import type { AcceptedFlag } from "../accepted.ts";

/** Note of a file in which a number means another antenna in each sub-array: a row of a flag table would mean several. */
const AMBIGUOUS = "subarrays-renumbered";

/** Where flags are kept in a file. */
export const PLACES = ["weights", "flag-table", "flag-column"] as const;
export type FlagPlace = (typeof PLACES)[number];

/** The places that a format has, the usual one first. */
export function placesOf(dataset: Dataset): readonly FlagPlace[] {
  switch (dataset.format) {
    case "fits-idi":
      return ["flag-table", "weights"];
    case "columnar":
      return ["flag-column", "weights"];
    default:
      return ["weights", "flag-table"];
  }
}

export interface CopyRequest {
  readonly dataset: Dataset;
  readonly flags: readonly AcceptedFlag[];
  readonly place: FlagPlace;
  /** one a file of the dataset */
  readonly paths: readonly string[];
  readonly openFile: OpenFile;
  readonly onFile: (share: number) => void;
}

export interface Copied {
  /** rows that flag tables gained */
  readonly tableRows: number;
}

/** @throws CannotHoldFlags where the place has no room for these flags */
export async function copyFiles(request: CopyRequest): Promise<Copied> {
  const { dataset, paths } = request;
  if (dataset.format === "columnar") {
    await copyTables(request);
    return { tableRows: 0 };
  }
  let tableRows = 0;
  let firstRow = 0;
  for (const [i, path] of dataset.files.entries()) {
    const own = await openFitsDataset(path, knownRows(dataset, i));
    const sink = await openSink(paths[i]!, /\.gz$/i.test(paths[i]!), request.openFile);
    try {
      const rows = { dataset, firstRow, rows: own.rows, selections: request.flags };
      tableRows += await copyFitsFile(request, own, rows, sink);
      await sink.finish();
    } catch (error) {
      await sink.abandon();
      throw error;
    }
    firstRow += own.rows;
    request.onFile((i + 1) / dataset.files.length);
  }
  return { tableRows };
}

async function copyTables(request: CopyRequest): Promise<void> {
  const { dataset, flags, place, paths, openFile, onFile } = request;
  const { copyFlaggedTables } = await import("../../dataset/columnar/copy-flagged.ts");
  const sinks = paths.map((path) => () => openSink(path, /\.gz$/i.test(path), openFile));
  await copyFlaggedTables(dataset, flags, place === "weights" ? place : "flag-column", { sinks, onFile });
}

/** What the first opening of file `i` found in its rows. */
function knownRows({ recipe }: Dataset, i: number) {
  return recipe?.kind === "files" ? recipe.known[i] : undefined;
}

async function copyFitsFile(
  { flags, place }: CopyRequest,
  own: Dataset,
  rows: RowsOfFile,
  sink: ByteSink,
): Promise<number> {
  const file = await openFits(await openSource(own.files[0]!));
  const isIdi = own.format === "fits-idi";
  if (place === "weights") {
    await (isIdi ? copyFlaggingIdiWeights : copyFlaggingWeights)(file, rows, sink);
    return 0;
  }
  // What joining several files renumbers is told by laying their rows beside the dataset's.
  if (own.notes.some(({ code }) => code === AMBIGUOUS)) {
    throw new CannotHoldFlags("the sub-arrays of the file use the same numbers for different antennas");
  }
  const reasoned = flags.map((flag) => ({ selection: flag, reason: `${flag.id} ${flag.rule}` }));
  return (isIdi ? copyAddingIdiFlags : copyAddingFlags)(file, rows, own, reasoned, sink);
}
