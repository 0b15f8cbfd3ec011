/** From rows of values to a measure, with every column its form promises. */
import { table } from "arquero";
import type { Measure } from "./table.ts";

/** A measure without its numbers. */
export type MeasureForm = Omit<Measure, "table">;

/** A value of a measure: NaN unknown number, null unknown name. */
export type Cell = number | string | null;
export type Row = Readonly<Record<string, Cell>>;

/**
 * @param rows one object a row, with exactly the form's columns
 * @throws RangeError when a row lacks a column or has one that the form does not know: a defect of ours
 */
export function fillMeasure(form: MeasureForm, rows: readonly Row[]): Measure {
  const names = form.columns.map((column) => column.name);
  for (const row of rows) {
    const missing = names.find((name) => row[name] === undefined);
    const extra = Object.keys(row).find((name) => !names.includes(name));
    if (missing !== undefined) throw new RangeError(`measure ${form.name}: a row lacks ${missing}`);
    if (extra !== undefined) throw new RangeError(`measure ${form.name}: no column ${extra}`);
  }
  const data = Object.fromEntries(names.map((name) => [name, rows.map((row) => row[name]!)]));
  return { ...form, table: table(data, names) };
}
