/**
 * A copy of a random-groups file with flags as rows of a flag table (FG) at its end. A file that has one gets a later
 * version, which holds the earlier one's rows and the new ones: readers take the last.
 */
import type { ByteSink } from "../../util/byte-sink.ts";
import type { Dataset } from "../dataset.ts";
import { copyWithTable } from "../fits/append.ts";
import type { Cursor } from "../fits/byte-source.ts";
import type { FitsFile, Hdu } from "../fits/hdus.ts";
import { type Column, findColumn, tableLayout } from "../fits/table-layout.ts";
import { readTable, type Table } from "../fits/table-rows.ts";
import { binaryTable, type ColumnToWrite } from "../fits/write.ts";
import { ascii } from "../fits/write-header.ts";
import { readAntennaTable } from "../fits-tables/antenna-table.ts";
import { fileNumbers } from "../fits-tables/file-numbers.ts";
import { flagRowsOf, type ReasonedSelection, runsOf } from "../fits-tables/flag-rows.ts";
import { type FlagClock, TIME_STEP } from "../fits-tables/flag-times.ts";
import { Notes } from "../notes.ts";
import type { RowsOfFile } from "../rows-of-file.ts";
import { findTables } from "./tables.ts";

/** What a row of the table says, as stored; 0 and (0, 0): all. */
interface StoredRow {
  readonly source: number;
  readonly subarray: number;
  readonly setup: number;
  readonly antennas: readonly [number, number];
  readonly times: readonly [number, number];
  readonly subbands: readonly [number, number];
  readonly channels: readonly [number, number];
  readonly polarizations: readonly boolean[];
  readonly reason: string;
}

/**
 * @param own the file opened by itself
 * @returns rows added
 * @throws CannotHoldFlags where a flag table cannot say what is selected
 */
export async function copyAddingFlags(
  file: FitsFile,
  rows: RowsOfFile,
  own: Dataset,
  selections: readonly ReasonedSelection[],
  sink: ByteSink,
): Promise<number> {
  const hdus = findTables(file, new Notes());
  const cursor = await file.source.cursor();
  let clock: FlagClock | undefined;
  let earlier: Earlier = { rows: [], form: "E" };
  try {
    const antennas = hdus.antennas[0];
    if (antennas !== undefined) {
      const { referenceDay, timeOffset } = await readAntennaTable(cursor, antennas, new Notes());
      if (referenceDay !== null) clock = { referenceDay, timeOffset };
    }
    if (hdus.flags !== undefined) earlier = await readEarlier(cursor, hdus.flags);
  } finally {
    await cursor.close();
  }
  const { rows: added, timeForm } = flagRowsOf(selections, await fileNumbers(rows, own, clock));
  const stored = added.flatMap((row): StoredRow[] =>
    runsOf(row.subbands).map((subbands) => ({ ...row, source: row.field, subarray: 0, setup: 0, subbands })),
  );
  const form = timeForm === "D" || earlier.form === "D" ? "D" : "E";
  const kept = form === earlier.form ? earlier.rows : earlier.rows.map(withWidenedTimes);
  const table = binaryTable({
    name: `${prefixOf(file)} FG`,
    version: (hdus.flags?.version ?? 0) + 1,
    columns: columnsOf([...kept, ...stored], form, Math.max(4, own.polarizations.length)),
  });
  await copyWithTable(file, stored.length === 0 ? new Uint8Array(0) : table, sink);
  return stored.length;
}

/** Tables of one file share the words before the last of their names. */
function prefixOf({ hdus }: FitsFile): string {
  const names = hdus.slice(1).map(({ name }) => /^(.+\S)\s+(?:AN|FQ|SU|FG)$/.exec(name.trim())?.[1]);
  return names.find((name) => name !== undefined) ?? "VISVET";
}

const REASON_LENGTH = 24;

function columnsOf(rows: readonly StoredRow[], form: "E" | "D", bits: number): ColumnToWrite[] {
  const width = Math.max(REASON_LENGTH, ...rows.map(({ reason }) => reason.length));
  return [
    { name: "SOURCE", form: "1J", cells: rows.map(({ source }) => source) },
    { name: "SUBARRAY", form: "1J", cells: rows.map(({ subarray }) => subarray) },
    { name: "FREQ ID", form: "1J", cells: rows.map(({ setup }) => setup) },
    { name: "ANTS", form: "2J", cells: rows.map(({ antennas }) => antennas) },
    { name: "TIME RANGE", form: `2${form}`, unit: "DAYS", cells: rows.map(({ times }) => times) },
    { name: "IFS", form: "2J", cells: rows.map(({ subbands }) => subbands) },
    { name: "CHANS", form: "2J", cells: rows.map(({ channels }) => channels) },
    {
      name: "PFLAGS",
      form: `${bits}X`,
      cells: rows.map(({ polarizations }) =>
        Array.from({ length: bits }, (_, p) => polarizations[p] ?? false),
      ),
    },
    { name: "REASON", form: `${width}A`, cells: rows.map(({ reason }) => ascii(reason)) },
  ];
}

interface Earlier {
  readonly rows: readonly StoredRow[];
  /** of its times */
  readonly form: "E" | "D";
}

async function readEarlier(cursor: Cursor, hdu: Hdu): Promise<Earlier> {
  const table = await readTable(cursor, tableLayout(hdu));
  const find = (...names: string[]) => findColumn(table.layout, ...names);
  const source = find("SOURCE", "SOURCE_ID");
  const subarray = find("SUBARRAY", "ARRAY");
  const setup = find("FREQ ID", "FREQID", "FREQ_ID");
  const antennas = find("ANTS");
  const times = find("TIME RANGE", "TIMERANG");
  const subbands = find("IFS");
  const channels = find("CHANS");
  const reason = find("REASON");
  const products = find("PFLAGS");
  const rows = Array.from({ length: table.rows }, (_, row) => ({
    source: whole(table, row, source, 0),
    subarray: whole(table, row, subarray, 0),
    setup: whole(table, row, setup, 0),
    antennas: pair(table, row, antennas),
    times: pair(table, row, times),
    subbands: pair(table, row, subbands),
    channels: pair(table, row, channels),
    polarizations: bitsOf(table, row, products),
    reason: reason === undefined ? "" : table.text(row, reason),
  }));
  return { rows, form: times?.code === "D" ? "D" : "E" };
}

function whole(table: Table, row: number, column: Column | undefined, k: number): number {
  const value = column === undefined ? 0 : table.number(row, column, k);
  return Number.isFinite(value) ? value : 0;
}

function pair(table: Table, row: number, column: Column | undefined): [number, number] {
  return [whole(table, row, column, 0), whole(table, row, column, 1)];
}

function bitsOf(table: Table, row: number, column: Column | undefined): boolean[] {
  if (column === undefined) return Array(32).fill(true);
  if (column.code === "X") return table.bits(row, column);
  return Array.from(table.numbers(row, column), (value) => value !== 0);
}

/** As wide in float64 as readers make the float32 that it was. */
function withWidenedTimes(row: StoredRow): StoredRow {
  const [start, end] = row.times;
  if (start === 0 && end === 0) return row;
  return { ...row, times: [start - Math.abs(start) * TIME_STEP.E, end + Math.abs(end) * TIME_STEP.E] };
}
