/** Open the visibilities of one observation, in one file or many, of any format that is read. */
import { basename } from "node:path";
import { InputError } from "../util/errors.ts";
import { isMapName, looksColumnar } from "./columnar/open-tables.ts";
import { type FoundFiles, findFiles } from "./find-files.ts";
import { joinFits } from "./joined/join.ts";
import { type FileKind, headOf, isFits, kindOfFile } from "./kinds.ts";
import { Notes } from "./notes.ts";
import { openFitsDataset } from "./open-fits.ts";
import type { KnownRows, OpenOptions } from "./recipe.ts";
import type { OpenedDataset } from "./row-summary.ts";

/**
 * Open a file, a folder of files, a glob, or several of these, as one dataset.
 *
 * The rows are looked at once here (their columns, not their samples), so that what the tables leave out is known.
 * Files in a folder that hold no visibilities are left out and named in a note.
 *
 * @throws InputError with advice when a file cannot be read, is of another kind, or is malformed, or when the files do
 *   not belong to one observation
 */
export async function openDataset(
  path: string | readonly string[],
  options: OpenOptions = {},
): Promise<OpenedDataset> {
  const found = await findFiles(path);
  if (!found.searched && found.paths.length === 1) return openFiles(found.paths, options);
  const notes = new Notes();
  const chosen = await choose(found, notes);
  const dataset = await openFiles(chosen, options);
  return { ...dataset, notes: [...dataset.notes, ...notes.list()] };
}

/**
 * @param paths of files alone, in the order of their rows
 * @param known what an earlier opening found in the rows: saves looking at them again
 */
export async function openFiles(
  paths: readonly string[],
  options: OpenOptions,
  known?: KnownRows,
): Promise<OpenedDataset> {
  const [first, second] = paths;
  const head = await headOf(first!);
  if (!isFits(head) && isTable(head, first!)) return openTables(paths, options, known);
  return second === undefined ? openFitsDataset(first!, known?.[0]) : joinFits(paths, known);
}

/** Whether a file that is not FITS is a table of visibilities. */
function isTable(head: Uint8Array, path: string): boolean {
  return looksColumnar(head, path);
}

async function openTables(
  paths: readonly string[],
  options: OpenOptions,
  known?: KnownRows,
): Promise<OpenedDataset> {
  // The readers of tables are large, and most datasets are FITS files.
  const { openColumnar } = await import("./columnar/open.ts");
  return openColumnar(paths, { ...options, known: known?.[0] });
}

const KIND_NAMES: Readonly<Record<FileKind, string>> = {
  "random-groups": "random-groups FITS",
  "fits-idi": "FITS-IDI",
  columnar: "a table of columns",
};

/** Of the files found, those that hold visibilities, all of them of one kind. */
async function choose(found: FoundFiles, notes: Notes): Promise<string[]> {
  const { paths, searched, asked } = found;
  const chosen: string[] = [];
  const others: string[] = [];
  let first: { path: string; kind: FileKind } | undefined;
  for (const path of paths) {
    const kind = await kindOfFile(path, isTable);
    if (kind === null) {
      if (!searched) throw notVisibilities(path);
      if (!isMapName(path)) others.push(basename(path));
      continue;
    }
    first ??= { path, kind };
    if (kind !== first.kind) {
      throw new InputError(
        `this is ${KIND_NAMES[kind]}, and ${basename(first.path)} is ${KIND_NAMES[first.kind]}: expected one kind`,
        { file: path },
        "Name the files of one kind, such as with a glob",
      );
    }
    chosen.push(path);
  }
  if (chosen.length === 0) {
    throw new InputError(
      `none of the ${paths.length} files there holds visibilities: found ${listed(others)}`,
      { file: asked },
      "visvet reads random-groups FITS, FITS-IDI, and columnar tables (CSV, Parquet, Arrow)",
    );
  }
  if (others.length > 0) {
    notes.note("files-left-out", `not visibilities and left out: ${listed(others)}`);
  }
  return chosen;
}

function notVisibilities(path: string): InputError {
  return new InputError(
    "this file holds no visibilities",
    { file: path },
    "visvet reads random-groups FITS, FITS-IDI, and columnar tables (CSV, Parquet, Arrow)",
  );
}

function listed(names: readonly string[]): string {
  const more = names.length > 8 ? ` and ${names.length - 8} more` : "";
  return `${names.slice(0, 8).join(", ")}${more}`;
}
