/**
 * Every measure as a table of its own in the folder `tables`, for a notebook to go on where the report ends, and
 * `columns.csv`, which says what each column of each table holds.
 */
import { join } from "node:path";
import type { Measure } from "../measure/table.ts";
import {
  type CellType,
  type ColumnTable,
  type NamedColumn,
  type TableFormat,
  tableBytes,
} from "../util/column-table.ts";
import { csvText } from "../util/csv-text.ts";
import { writeBytesFile, writeTextFile } from "../util/write-file.ts";
import { makeFolder } from "./make-folder.ts";
import type { Check } from "./report.ts";

/**
 * @param folder of the check's output; made where it is not there
 * @returns the paths written, `columns.csv` first
 * @throws InputError when the folder or a file cannot be written
 */
export async function writeTables(
  check: Pick<Check, "measures">,
  folder: string,
  format: TableFormat,
): Promise<string[]> {
  const tables = [...check.measures.values()].map((measure) => ({ measure, table: measureTable(measure) }));
  const into = join(folder, "tables");
  await makeFolder(into);
  const about = join(into, "columns.csv");
  await writeTextFile(about, csvText(columnsTable(tables)));
  const paths = [about];
  for (const { measure, table } of tables) {
    const path = join(into, `${measure.name}.${format}`);
    await writeBytesFile(path, await tableBytes(table, format));
    paths.push(path);
  }
  return paths;
}

/** Columns of text, also where no row of them has any. */
const TEXT = new Set([
  "name",
  "polarization",
  "kind",
  "cause",
  "unit",
  "repair",
  "evidence",
  "weighting",
  "limited_by",
  "text",
  "why_not",
  "fault",
  "fault_text",
  "axis_fault",
  "unit_fault",
  "frame",
  "convention",
]);

/** Names that are numbers: missing where a row is about all of them. */
const IDS = new Set([
  "antenna",
  "antenna1",
  "antenna2",
  "subband",
  "channel",
  "channel_lo",
  "channel_hi",
  "field",
  "scan",
  "off_antenna",
  "ridge_antenna",
]);

/** A measure with typed columns; the same types whatever the dataset. */
export function measureTable({ title, columns, table }: Measure): ColumnTable {
  return {
    title,
    rows: table.numRows(),
    columns: columns.map(({ name, unit, meaning }): NamedColumn => {
      // NaN of a measure is an unknown number, null an unknown name: both are kept.
      const values = table.array(name) as ArrayLike<number | string | null>;
      return { name, type: typeOf(name, values), unit, meaning, values };
    }),
  };
}

function typeOf(name: string, values: ArrayLike<number | string | null>): CellType {
  let whole = IDS.has(name);
  for (let i = 0; i < values.length; i++) {
    const value = values[i];
    if (typeof value === "string") return "text";
    if (value !== null && !Number.isInteger(value)) whole = false;
  }
  if (TEXT.has(name)) return "text";
  return whole ? "integer" : "number";
}

const MISSING: Readonly<Record<CellType, string>> = {
  integer: "missing: all of them, or none known",
  number: "NaN: unknown; missing: does not apply",
  text: "missing: all of them, or none known",
};

interface OneTable {
  readonly measure: Measure;
  readonly table: ColumnTable;
}

function columnsTable(tables: readonly OneTable[]): ColumnTable {
  const rows = tables.flatMap(({ measure, table }) =>
    table.columns.map((column) => ({ table: measure.name, each: measure.each, ...column })),
  );
  const text = (name: string, meaning: string, of: (row: (typeof rows)[number]) => string): NamedColumn => ({
    name,
    type: "text",
    unit: "",
    meaning,
    values: rows.map(of),
  });
  return {
    title: "Columns of the tables",
    rows: rows.length,
    columns: [
      text("table", "name of the table's file, without its ending", ({ table }) => table),
      text("row", "what a row of the table is about", ({ each }) => each),
      text("column", "name of the column", ({ name }) => name),
      text("type", "integer (32 bits), number (float64) or text", ({ type }) => type),
      text("unit", "empty: none, or the one that the meaning names", ({ unit }) => unit),
      text("meaning", "what it holds", ({ meaning }) => meaning),
      text("missing_values", "what NaN and a missing cell mean", ({ type }) => MISSING[type]),
    ],
  };
}
