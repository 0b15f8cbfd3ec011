/** The rows of one file as the dataset sees them, with the selections made there. */
import type { Dataset } from "./dataset.ts";
import type { Selection } from "./selection.ts";

export interface RowsOfFile {
  /** the whole: antennas and fields may have other numbers there than in the file */
  readonly dataset: Dataset;
  /** the row of the dataset that is the file's first */
  readonly firstRow: number;
  readonly rows: number;
  /** in the dataset's numbers */
  readonly selections: readonly Selection[];
}
