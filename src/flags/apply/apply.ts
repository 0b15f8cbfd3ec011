/**
 * A copy of a dataset with accepted flags set and everything else as it was: made beside its final name, read back and
 * compared with what it should be, and only then given the name. The dataset itself is only read.
 */
import { basename, join } from "node:path";
import { CannotHoldFlags } from "../../dataset/cannot-hold.ts";
import type { Dataset } from "../../dataset/dataset.ts";
import { countSelections, flaggedView, type SelectionCounts } from "../../dataset/flagged-view.ts";
import { openDataset } from "../../dataset/open.ts";
import { InputError } from "../../util/errors.ts";
import { cannotWrite, NewOutput, type OpenFile, requireNothing } from "../../util/new-output.ts";
import { writeTextFile } from "../../util/write-file.ts";
import type { AcceptedFlag } from "../accepted.ts";
import { type Copied, copyFiles, type FlagPlace, placesOf } from "./copy-files.ts";
import { refuseInside } from "./own-folder.ts";
import { compareDatasets } from "./verify.ts";

export interface ApplyRequest {
  readonly dataset: Dataset;
  readonly flags: readonly AcceptedFlag[];
  /** a file where the dataset is one, else a folder; packed by gzip where the name ends in .gz */
  readonly out: string;
  /** where the flags go; default the usual place of the format, or another one where that has no room for them */
  readonly into?: FlagPlace | undefined;
  /** what the user named as the dataset, so that the copy is not made among its files */
  readonly named?: readonly string[];
  /** told the stage at hand and the share of it that is done, 0..1 */
  readonly onStage?: (stage: string, share: number) => void;
  /** opens the files written; tests put one here that fails */
  readonly openFile?: OpenFile;
}

export interface Applied {
  /** what each flag holds, together and of all, before anything was applied */
  readonly counts: SelectionCounts;
  readonly into: FlagPlace;
  /** why the flags are not in the usual place, a clause; null where they are */
  readonly insteadOf: { readonly place: FlagPlace; readonly why: string } | null;
  /** rows that flag tables gained */
  readonly tableRows: number;
  /** files written */
  readonly paths: readonly string[];
}

/** What flags would change, and nothing written: the counts alone. */
export async function countFlags(dataset: Dataset, flags: readonly AcceptedFlag[]): Promise<SelectionCounts> {
  return countSelections(dataset, flags);
}

/**
 * @throws InputError when the output exists or cannot be written, when the flags have no room in the place asked for, or
 *   when the copy does not read back as it should; nothing is left behind then
 */
export async function applyFlags(request: ApplyRequest): Promise<Applied> {
  const { dataset, flags, out } = request;
  requireFiles(dataset);
  await refuseInside(request.named ?? [], out);
  await requireNothing(out);
  if (dataset.format === "columnar" && dataset.files.length === 1) await requireNothing(out + MAP_ENDING);
  request.onStage?.("Counting", 0);
  const counts = await countSelections(dataset, flags);
  const places = placesFor(dataset, request.into);
  let insteadOf: Applied["insteadOf"] = null;
  for (const [i, place] of places.entries()) {
    try {
      const { tableRows, paths } = await makeCopy(request, place, counts);
      return { counts, into: place, insteadOf, tableRows, paths };
    } catch (error) {
      if (!(error instanceof CannotHoldFlags)) throw error;
      if (i + 1 === places.length) throw noRoom(dataset, place, error, request.into);
      insteadOf = { place, why: error.message };
    }
  }
  throw new RangeError(`format ${dataset.format} has no place for flags`);
}

/** Rows are told by their places in the files: a view of some of them has others. */
function requireFiles({ name, files, recipe }: Dataset): void {
  if (files.length > 0 && (recipe === undefined || recipe.kind === "files")) return;
  throw new InputError(
    files.length === 0
      ? `${name} is not in a file: there is nothing to copy`
      : `${name} is a view of a dataset: expected the dataset as it was opened`,
    {},
    "Give the dataset that openDataset gave",
  );
}

function placesFor(dataset: Dataset, into: FlagPlace | undefined): readonly FlagPlace[] {
  const places = placesOf(dataset);
  if (into === undefined) return places;
  if (places.includes(into)) return [into];
  throw new InputError(
    `flags of this dataset (${dataset.format}) cannot go into a ${into.replace("-", " ")}`,
    { file: dataset.files[0] ?? dataset.name },
    `Its places are ${places.join(" and ")}`,
  );
}

function noRoom(
  dataset: Dataset,
  place: FlagPlace,
  error: CannotHoldFlags,
  into: FlagPlace | undefined,
): InputError {
  const other = placesOf(dataset).find((one) => one !== place);
  return new InputError(
    `the ${placeName(place)} cannot hold these flags: ${error.message}`,
    { file: dataset.files[0] ?? dataset.name },
    error.advice ??
      (into === undefined
        ? "Write the dataset again in a form that can"
        : `Use --into ${other}, or leave --into out`),
    { cause: error },
  );
}

export function placeName(place: FlagPlace): string {
  return place.replace("-", " ");
}

async function makeCopy(
  request: ApplyRequest,
  place: FlagPlace,
  counts: SelectionCounts,
): Promise<Copied & { paths: string[] }> {
  const { dataset, flags, out } = request;
  const single = dataset.files.length === 1;
  const output = await NewOutput.begin(out, request.openFile);
  try {
    const names = single ? [basename(out)] : distinctNames(dataset.files);
    const made = names.map((name) => join(output.folder, name));
    const copied = await copyFiles({
      dataset,
      flags,
      place,
      paths: made,
      openFile: output.openFile,
      onFile: (share) => request.onStage?.("Copying", share),
    });
    const map = await writeColumnMap(request, output);
    await verify(request, made, counts);
    if (single) await output.keepFile(map === null ? [] : [MAP_ENDING]);
    else await output.keepFolder();
    const paths = single ? [out] : names.map((name) => join(out, name));
    return { ...copied, paths: map === null ? paths : [...paths, map] };
  } catch (error) {
    await output.drop();
    if (error instanceof InputError || error instanceof CannotHoldFlags) throw error;
    // What the system refuses is the user's to mend; anything else is a defect.
    if (typeof (error as NodeJS.ErrnoException).code === "string") throw cannotWrite(out, error);
    throw error;
  }
}

/** What a map of columns is called that lies beside one table, and beside the tables of a folder. */
const MAP_ENDING = ".columns.yaml";
const FOLDER_MAP = "columns.yaml";

/** Tables are read by a map of their columns: the copy gets the one in force beside it. @returns its final path */
async function writeColumnMap({ dataset, out }: ApplyRequest, output: NewOutput): Promise<string | null> {
  if (dataset.format !== "columnar") return null;
  const { columnMapTextOf } = await import("../../dataset/columnar/copy-flagged.ts");
  const single = dataset.files.length === 1;
  const text = columnMapTextOf(dataset);
  await writeTextFile(single ? output.file + MAP_ENDING : join(output.folder, FOLDER_MAP), text);
  return single ? out + MAP_ENDING : join(out, FOLDER_MAP);
}

/** Files of one name from several folders cannot all go into one. */
function distinctNames(files: readonly string[]): string[] {
  const names = files.map((file) => basename(file));
  const twice = names.find((name, i) => names.indexOf(name) !== i);
  if (twice === undefined) return names;
  throw new InputError(
    `several files of the dataset are called ${twice}: their copies cannot lie in one folder`,
    { file: twice },
    "Apply the flags to one folder at a time",
  );
}

async function verify(
  { dataset, flags, out, onStage }: ApplyRequest,
  made: readonly string[],
  counts: SelectionCounts,
): Promise<void> {
  onStage?.("Reading back", 0);
  // Of tables by the map beside them, as everybody will open them.
  const copy = await openDataset(made.length === 1 ? made[0]! : made);
  const { difference, unflagged } = await compareDatasets(flaggedView(dataset, flags), copy);
  const expected = counts.total.unflagged - counts.union.unflagged;
  const wrong =
    difference ?? (unflagged === expected ? null : `${unflagged} samples are usable, expected ${expected}`);
  if (wrong === null) return;
  throw new InputError(
    `the copy does not read back as it should (${wrong}) and was removed`,
    { file: out },
    "The dataset changed meanwhile, the disk is faulty, or visvet is: run it again, and report it if it happens again",
  );
}
