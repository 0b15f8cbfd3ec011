/**
 * Several FITS files of one observation as one dataset. Rows stay as they are in each file, and the files follow each
 * other in the order of their first times; numbers of antennas, fields and setups that clash become others.
 */
import { basename, dirname } from "node:path";
import { InputError } from "../../util/errors.ts";
import type { BlockRequest, Dataset, Note } from "../dataset.ts";
import { datasetName } from "../name.ts";
import { Notes } from "../notes.ts";
import { openFitsDataset } from "../open-fits.ts";
import type { KnownRows } from "../recipe.ts";
import { type OpenedDataset, type RowSummary, summarizeRows } from "../row-summary.ts";
import { JoinedAntennas } from "./antennas.ts";
import { type JoinedRows, joinedBlocks, type PartNumbers } from "./blocks.ts";
import { JoinedFields } from "./fields.ts";
import { NotesOfFiles } from "./notes-of-files.ts";
import { Parts } from "./parts.ts";
import { JoinedSetups, requireSameForm } from "./setups.ts";
import { type FileInTime, inTimeOrder, noteTimeRanges } from "./time-ranges.ts";

/** Probe rows kept of all files together; each file keeps some. */
const MOST_PROBES = 8192;
const FEWEST_PROBES = 16;

/**
 * @param known of an earlier opening: of each file in the order of time, then of the dataset
 * @throws InputError where a file is malformed, or does not go with the others
 */
export async function joinFits(paths: readonly string[], known?: KnownRows): Promise<OpenedDataset> {
  const parts = known === undefined ? await ordered(paths) : new Parts(paths, known.slice(0, paths.length));
  const notes = new Notes();
  const { common, numbers, bytes, partNotes } = await joinTables(parts, notes);
  noteTimeRanges(
    parts.paths.map((path, i) => fileInTime(path, parts.known[i]!, numbers[i]!)),
    notes,
  );
  const start = new Float64Array(parts.paths.length + 1);
  for (const [i, { rows }] of parts.known.entries()) start[i + 1] = start[i]! + rows;
  const joined: JoinedRows = { parts, numbers, start };
  const blocks = (request: BlockRequest) => joinedBlocks(joined, request);
  const rows = start.at(-1)!;
  const summary = known?.[paths.length] ?? thinned(await summarizeRows({ rows, blocks }), MOST_PROBES);
  return {
    ...common,
    name: joinedName(parts.paths),
    files: parts.paths,
    bytes,
    rows,
    notes: [...partNotes, ...notes.list()],
    summary,
    recipe: { kind: "files", paths: parts.paths, options: {}, known: [...parts.known, summary] },
    blocks,
  };
}

function fileInTime(path: string, summary: RowSummary, { setups }: PartNumbers): FileInTime {
  return { path, summary, setups: summary.setups.map(({ index }) => setups?.[index] ?? index) };
}

/** Every file's rows are looked at once, and the files put in the order of time. */
async function ordered(paths: readonly string[]): Promise<Parts> {
  const most = Math.max(FEWEST_PROBES, Math.floor(MOST_PROBES / paths.length));
  const files: { path: string; summary: RowSummary }[] = [];
  for (const path of paths) {
    const { summary } = await openFitsDataset(path);
    files.push({ path, summary: thinned(summary, most) });
  }
  const order = inTimeOrder(files);
  return new Parts(
    order.map((i) => files[i]!.path),
    order.map((i) => files[i]!.summary),
  );
}

function thinned(summary: RowSummary, most: number): RowSummary {
  const every = Math.ceil(summary.probe.length / most);
  return every <= 1 ? summary : { ...summary, probe: summary.probe.filter((_, i) => i % every === 0) };
}

interface JoinedTables {
  readonly common: Pick<
    Dataset,
    "format" | "header" | "array" | "fields" | "setups" | "polarizations" | "shape" | "unit" | "hasWeights"
  >;
  readonly numbers: readonly PartNumbers[];
  readonly bytes: number;
  readonly partNotes: readonly Note[];
}

async function joinTables(parts: Parts, notes: Notes): Promise<JoinedTables> {
  const antennas = new JoinedAntennas(notes);
  const fields = new JoinedFields(notes);
  const setups = new JoinedSetups();
  const saidOfFiles = new NotesOfFiles(parts.paths.length);
  const numbers: PartNumbers[] = [];
  const { format, header, polarizations, shape, unit, hasWeights } = await parts.open(0);
  const form = { polarizations, shape, unit, hasWeights };
  let bytes = 0;
  for (const [i, path] of parts.paths.entries()) {
    const part = await parts.open(i);
    if (part.format !== format) {
      throw new InputError(
        `this is ${part.format}, and ${parts.paths[0]} is ${format}: expected one format`,
        { file: path },
        "Name the files of one format, or check each on its own",
      );
    }
    requireSameForm(form, basename(parts.paths[0]!), part, path);
    numbers.push({
      antennas: antennas.add(part.array, path),
      fields: fields.add(part.fields, path),
      setups: setups.add(part.setups),
    });
    saidOfFiles.add(basename(path), part.notes);
    bytes += part.bytes;
  }
  return {
    common: {
      format,
      header,
      array: antennas.finish(),
      fields: fields.finish(),
      setups: setups.finish(),
      ...form,
    },
    numbers,
    bytes,
    partNotes: saidOfFiles.list(),
  };
}

/** What the names of the files begin with alike, else the name of their folder. */
function joinedName(paths: readonly string[]): string {
  const names = paths.map(datasetName);
  let common = names[0]!;
  for (const name of names) while (!name.startsWith(common)) common = common.slice(0, -1);
  const bare = common.replace(/[-_.\s]+$/, "").replace(/[-_.\s](part|scan|p|s)$/i, "");
  if (bare.length >= 2) return bare;
  const folder = basename(dirname(paths[0]!));
  return folder === "" || folder === "." || folder === ".." ? names[0]! : folder;
}
