/** Columns as CSV or TSV. Every number is printed in the fewest digits that read back as the same number. */
import type { ColumnUse } from "../dataset/columnar/column-map.ts";
import type { Dataset, SampleBlock } from "../dataset/dataset.ts";
import { SECONDS_PER_DAY } from "../util/constants.ts";
import type { RowFacts, WrittenColumn, WrittenTable } from "./columnar-columns.ts";

/** A single-precision number in the fewest digits, at most nine, that round to it (IEEE 754-2008, 5.12.2). */
export function singleText(value: number): string {
  if (!Number.isFinite(value) || value === 0) return oddText(value);
  if (Number.isInteger(value) && Math.abs(value) < 1e7) return String(value);
  for (let digits = 6; digits < 9; digits++) {
    const short = Number(value.toPrecision(digits));
    if (Math.fround(short) === value) return String(short);
  }
  return String(Number(value.toPrecision(9)));
}

export function doubleText(value: number): string {
  return Number.isFinite(value) && value !== 0 ? String(value) : oddText(value);
}

function oddText(value: number): string {
  if (value === 0) return Object.is(value, -0) ? "-0" : "0";
  if (Number.isNaN(value)) return "nan";
  return value > 0 ? "inf" : "-inf";
}

/** Single-precision seconds of light travel as nanoseconds in the fewest digits that come back as the same. */
function nanosecondsText(seconds: number): string {
  if (!Number.isFinite(seconds) || seconds === 0) return oddText(seconds);
  for (let digits = 6; digits < 14; digits++) {
    const short = Number((seconds * 1e9).toPrecision(digits));
    if (Math.fround(short / 1e9) === seconds) return String(short);
  }
  return String(seconds * 1e9);
}

/** Decimals of seconds since `day` that give the MJD back to its last bit; undefined when none do. */
function secondsText(time: number, day: number): string | undefined {
  const seconds = (time - day) * SECONDS_PER_DAY;
  for (let decimals = 0; decimals <= 9; decimals++) {
    const text = seconds.toFixed(decimals);
    if (day + Number(text) / SECONDS_PER_DAY === time) return text;
  }
  return undefined;
}

export interface TextUnits {
  readonly time: Omit<ColumnUse, "column">;
  readonly uvw: Omit<ColumnUse, "column">;
}

/** Short units where they lose nothing: seconds since the first day, and nanoseconds of single precision. */
export async function textUnits(dataset: Dataset, facts: RowFacts): Promise<TextUnits> {
  const uvw = facts.singleUvw ? { unit: "ns", single: true } : { unit: "s" };
  let day: number | undefined;
  let previous = Number.NaN;
  for await (const block of dataset.blocks({ want: "rows" })) {
    for (let row = 0; row < block.rows; row++) {
      const time = block.time[row]!;
      if (time === previous || Number.isNaN(time)) continue;
      previous = time;
      day ??= Math.floor(time);
      if (secondsText(time, day) === undefined) return { time: { unit: "mjd" }, uvw };
    }
  }
  return { time: day === undefined ? { unit: "mjd" } : { unit: "s", since: day }, uvw };
}

export function headerText({ columns }: WrittenTable, delimiter: string): string {
  return `${columns.map(({ name }) => name).join(delimiter)}\n`;
}

/** The lines of a block, in pieces of some hundred kilobytes. */
export function* linesOf(table: WrittenTable, block: SampleBlock, delimiter: string): Generator<string> {
  const { columns, repeat } = table;
  const texts = columns.map((column) => ({
    cells: column.cells(block),
    text: textOf(column, table),
    column,
  }));
  let piece = "";
  for (let row = 0; row < block.rows; row++) {
    const heads = texts.map(({ cells, text, column }) => (column.perRow ? text(cells[row]!) : ""));
    for (let i = 0; i < repeat; i++) {
      for (let c = 0; c < texts.length; c++) {
        const { cells, text, column } = texts[c]!;
        if (c > 0) piece += delimiter;
        if (column.perRow) piece += heads[c]!;
        else if (column.listLength > 0) piece += listText(cells, row, column.listLength, text);
        else piece += text(cells[row * repeat + i]!);
      }
      piece += "\n";
    }
    if (piece.length > 1 << 18) {
      yield piece;
      piece = "";
    }
  }
  if (piece !== "") yield piece;
}

function listText(
  cells: ArrayLike<number | string>,
  row: number,
  length: number,
  text: (cell: number | string) => string,
): string {
  const parts: string[] = [];
  for (let i = row * length; i < (row + 1) * length; i++) parts.push(text(cells[i]!));
  return `[${parts.join(" ")}]`;
}

function textOf({ role, type }: WrittenColumn, { map }: WrittenTable): (cell: number | string) => string {
  if (role === "time") {
    const since = map.uses.time?.since;
    if (since === undefined) return (cell) => doubleText(cell as number);
    return (cell) => (Number.isNaN(cell) ? "nan" : secondsText(cell as number, since)!);
  }
  if ((role === "u" || role === "v" || role === "w") && map.uses[role]?.unit === "ns") {
    return (cell) => nanosecondsText(cell as number);
  }
  if (type === "single") return (cell) => singleText(cell as number);
  return type === "text" ? String : (cell) => doubleText(cell as number);
}
