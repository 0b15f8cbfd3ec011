/** A table whose columns say what they hold, to be written as CSV, Parquet or Arrow with the same cells in each. */

/** integer: 32 bits; number: float64. Null is a missing cell in each, NaN an unknown number. */
export type CellType = "integer" | "number" | "text";

export interface NamedColumn {
  readonly name: string;
  readonly type: CellType;
  /** "" for none */
  readonly unit: string;
  readonly meaning: string;
  /** one a row; text is hostile */
  readonly values: ArrayLike<number | string | null>;
}

export interface ColumnTable {
  readonly title: string;
  readonly rows: number;
  readonly columns: readonly NamedColumn[];
}

export const TABLE_FORMATS = ["csv", "parquet", "arrow"] as const;
export type TableFormat = (typeof TABLE_FORMATS)[number];

/** Writers are loaded where they are used: each takes a while. */
export async function tableBytes(table: ColumnTable, format: TableFormat): Promise<Uint8Array> {
  switch (format) {
    case "csv":
      return Buffer.from((await import("./csv-text.ts")).csvText(table), "utf8");
    case "parquet":
      return (await import("./parquet-bytes.ts")).parquetBytes(table);
    case "arrow":
      return (await import("./arrow-bytes.ts")).arrowBytes(table);
  }
}
