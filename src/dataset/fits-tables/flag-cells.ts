/** Cells of a flag table: zeros that mean all, ranges that count from 1, times from the reference day. */
import type { Column } from "../fits/table-layout.ts";
import type { Table } from "../fits/table-rows.ts";
import type { AntennaTable } from "./antenna-table.ts";
import { type FlagClock, rangeFromStored } from "./flag-times.ts";

/** A longer table would be laid over every block for hours. */
export const MOST_FLAGS = 1_000_000;

/** A positive whole number; null for 0 and less, which mean all, and without a column. */
export function wholeOrNull(table: Table, row: number, column: Column | undefined): number | null {
  const value = column === undefined ? 0 : table.number(row, column);
  return value > 0 ? value : null;
}

export function pair(table: Table, row: number, column: Column | undefined): [number | null, number | null] {
  if (column === undefined) return [null, null];
  const [one, two] = [table.number(row, column, 0), table.number(row, column, 1)];
  return [one > 0 ? one : null, two > 0 ? two : null];
}

/** From the table's numbers, which count from 1; a missing first is the first, a missing last the last. */
export function range([first, last]: [number | null, number | null], count: number): [number, number] {
  return [(first ?? 1) - 1, Math.min(last ?? count, count) - 1];
}

export function clockOf(antennas: readonly AntennaTable[], subarray: number | null): FlagClock | undefined {
  const table = antennas.find((one) => one.subarray === subarray) ?? antennas[0];
  if (table === undefined || table.referenceDay === null) return undefined;
  return { referenceDay: table.referenceDay, timeOffset: table.timeOffset };
}

/** MJD (UTC, days), widened by one step of what holds it; undefined when it cannot be dated. */
export function timeRange(
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
export function products(table: Table, row: number, column: Column | undefined, count: number): boolean[] {
  if (column === undefined) return Array(count).fill(true);
  const bits =
    column.code === "X"
      ? table.bits(row, column)
      : Array.from(table.numbers(row, column), (value) => value !== 0);
  return Array.from({ length: count }, (_, p) => bits[p] ?? false);
}
