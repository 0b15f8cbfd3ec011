/** Open the visibilities of one observation, in one file or many, of any format that is read. */
import { openFitsDataset } from "./open-fits.ts";
import type { KnownRows, OpenOptions } from "./recipe.ts";
import type { OpenedDataset } from "./row-summary.ts";

/**
 * The rows are looked at once here (their columns, not their samples), so that what the tables leave out is known.
 *
 * @throws InputError with advice when a file cannot be read, is of another kind, or is malformed
 */
export async function openDataset(path: string, options: OpenOptions = {}): Promise<OpenedDataset> {
  return openFiles([path], options);
}

/**
 * @param paths of files alone, in the order of their rows
 * @param known what an earlier opening found in the rows: saves looking at them again
 */
export async function openFiles(
  paths: readonly string[],
  _options: OpenOptions,
  known?: KnownRows,
): Promise<OpenedDataset> {
  return openFitsDataset(paths[0]!, known?.[0]);
}
