/** The FG table: flags that were never put into the weights. By the visibility convention (Greisen 2016, recalled). */
import type { Setup, Shape } from "../dataset.ts";
import type { Cursor } from "../fits/byte-source.ts";
import type { Hdu } from "../fits/hdus.ts";
import { type Column, findColumn, tableLayout } from "../fits/table-layout.ts";
import { readTable, type Table } from "../fits/table-rows.ts";
import type { AntennaTable } from "../fits-tables/antenna-table.ts";
import { type FlagClock, rangeFromStored } from "../fits-tables/flag-times.ts";
import type { Notes } from "../notes.ts";
import type { TableFlag } from "../table-flags.ts";

/** A longer one would be laid over every block for hours. */
const MOST_FLAGS = 1_000_000;

/** @throws InputError when the table is malformed */
export async function readFlagTable(
  cursor: Cursor,
  hdu: Hdu,
  antennas: readonly AntennaTable[],
  setups: readonly Setup[],
  shape: Shape,
  notes: Notes,
): Promise<TableFlag[]> {
  const layout = tableLayout(hdu);
  if (layout.rows > MOST_FLAGS) {
    notes.fault(
      "flag-table-too-long",
      `the flag table (FG) has ${layout.rows} entries, more than ${MOST_FLAGS}: it is left out`,
    );
    return [];
  }
  const table = await readTable(cursor, layout);
  const find = (...names: string[]) => findColumn(table.layout, ...names);
  const columns = {
    source: find("SOURCE", "SOURCE_ID"),
    subarray: find("SUBARRAY", "ARRAY"),
    setup: find("FREQ ID", "FREQID", "FREQ_ID"),
    antennas: find("ANTS"),
    times: find("TIME RANGE", "TIMERANG"),
    subbands: find("IFS"),
    channels: find("CHANS"),
    polarizations: find("PFLAGS"),
  };
  const setupIndex = new Map(setups.map(({ id }, index) => [id, index]));
  const flags: TableFlag[] = [];
  let undated = 0;
  for (let row = 0; row < table.rows; row++) {
    const subarray = wholeOrNull(table, row, columns.subarray);
    const times = timeRange(table, row, columns.times, clockOf(antennas, subarray));
    const setupId = wholeOrNull(table, row, columns.setup);
    const setup = setupId === null ? null : (setupIndex.get(setupId) ?? -1);
    if (times === undefined) undated++;
    else {
      const [antenna, otherAntenna] = pair(table, row, columns.antennas);
      flags.push({
        field: wholeOrNull(table, row, columns.source),
        subarray,
        setup,
        // (0, b) is every baseline to b, as (b, 0) is.
        antenna: antenna ?? otherAntenna,
        otherAntenna: antenna === null ? null : otherAntenna,
        start: times[0],
        end: times[1],
        subbands: range(pair(table, row, columns.subbands), shape.subbands),
        channels: range(pair(table, row, columns.channels), shape.channels),
        polarizations: products(table, row, columns.polarizations, shape.polarizations),
      });
    }
  }
  if (undated > 0) {
    notes.fault(
      "flag-table-undated",
      `${undated} entries of the flag table (FG) name times, and no reference date is given: they are left out`,
    );
  }
  if (flags.length > 0) {
    const entries = flags.length === 1 ? "entry" : "entries";
    notes.note("flag-table-applied", `applied as flags: ${flags.length} ${entries} of the flag table (FG)`);
  }
  return flags;
}

/** A positive whole number; null for 0 and less, which mean all, and without a column. */
function wholeOrNull(table: Table, row: number, column: Column | undefined): number | null {
  const value = column === undefined ? 0 : table.number(row, column);
  return value > 0 ? value : null;
}

function pair(table: Table, row: number, column: Column | undefined): [number | null, number | null] {
  if (column === undefined) return [null, null];
  const [one, two] = [table.number(row, column, 0), table.number(row, column, 1)];
  return [one > 0 ? one : null, two > 0 ? two : null];
}

/** From the table's numbers, which count from 1; a missing first is the first, a missing last the last. */
function range([first, last]: [number | null, number | null], count: number): [number, number] {
  return [(first ?? 1) - 1, Math.min(last ?? count, count) - 1];
}

function clockOf(antennas: readonly AntennaTable[], subarray: number | null): FlagClock | undefined {
  const table = antennas.find((one) => one.subarray === subarray) ?? antennas[0];
  if (table === undefined || table.referenceDay === null) return undefined;
  return { referenceDay: table.referenceDay, timeOffset: table.timeOffset };
}

/** MJD (UTC, days), widened by one step of what holds it; undefined when it cannot be dated. */
function timeRange(
  table: Table,
  row: number,
  column: Column | undefined,
  clock: FlagClock | undefined,
): [number, number] | undefined {
  const always: [number, number] = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
  if (column === undefined) return always;
  const [start, end] = [table.number(row, column, 0), table.number(row, column, 1)];
  if (start === 0 && end === 0) return always;
  if (clock === undefined || !Number.isFinite(start + end)) return undefined;
  return rangeFromStored([start, end], clock, column.code === "D" ? "D" : "E");
}

/** Bits in the order of the STOKES axis; without a column all. */
function products(table: Table, row: number, column: Column | undefined, count: number): boolean[] {
  if (column === undefined) return Array(count).fill(true);
  const bits =
    column.code === "X"
      ? table.bits(row, column)
      : Array.from(table.numbers(row, column), (value) => value !== 0);
  return Array.from({ length: count }, (_, p) => bits[p] ?? false);
}
