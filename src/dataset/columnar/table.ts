/** A table file of any format as columns in batches of rows. */
import type { Place } from "../../util/errors.ts";

/** text: cells of text, which may spell numbers; timestamp: numbers, unix seconds */
export type ColumnKind = "number" | "text" | "boolean" | "timestamp" | "list" | "other";

export interface TableColumn {
  /** hostile text */
  readonly name: string;
  readonly kind: ColumnKind;
}

/** A run of rows. Cells: a number, bigint, text, boolean, null, or an array of these for a list. */
export interface Batch {
  /** index in the file, from 0 */
  readonly firstRow: number;
  readonly rows: number;
  /** (rows) of one of the columns that were asked for */
  column(name: string): ArrayLike<unknown>;
}

export interface Table {
  readonly file: string;
  readonly format: "text" | "parquet" | "arrow";
  readonly bytes: number;
  readonly columns: readonly TableColumn[];
  /** a column map that the file carries in its metadata, YAML; hostile text */
  readonly mapText: string | undefined;
  /**
   * The rows in the order of the file, a bounded number of cells at a time.
   * @param columns names of those that are read
   * @throws InputError where the file is malformed
   */
  batches(columns: readonly string[]): AsyncIterable<Batch>;
}

/** Key of the file's own metadata that holds the column map as YAML. */
export const MAP_KEY = "visvet.columns";

/** Values of a batch that are held at once, about. */
export const BATCH_VALUES = 1 << 20;
/** More is no table of visibilities. */
export const MOST_COLUMNS = 4096;

/** A row for messages, from 1. */
export function rowPlace(file: string, batch: Batch, row: number): Place {
  return { file, row: batch.firstRow + row + 1 };
}
