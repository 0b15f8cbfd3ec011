/**
 * Selections as rows of a flag table. A row names one field, one antenna or baseline and one range of channels, or all:
 * a selection of more is split into rows, which together take the same samples and no other.
 */
import { CannotHoldFlags } from "../cannot-hold.ts";
import type { Polarization, Shape } from "../dataset.ts";
import type { Selection } from "../selection.ts";
import { type FlagClock, rangeToStore } from "./flag-times.ts";

export interface FlagRow {
  /** 0: all */
  readonly field: number;
  /** (0, 0) all; (a, 0) every baseline to a */
  readonly antennas: readonly [number, number];
  /** days from the reference date; (0, 0) all */
  readonly times: readonly [number, number];
  /** one a sub-band */
  readonly subbands: readonly boolean[];
  /** from 1, both ends included; (0, 0) all */
  readonly channels: readonly [number, number];
  /** one a product, in the order of the file */
  readonly polarizations: readonly boolean[];
  readonly reason: string;
}

/** A selection and what the table says of it. */
export interface ReasonedSelection {
  readonly selection: Selection;
  readonly reason: string;
}

/** What the file calls the antennas and fields of the dataset, and when it has integrations. */
export interface FileNumbers {
  readonly shape: Shape;
  readonly polarizations: readonly Polarization[];
  /** undefined: the file has none of it */
  antenna(number: number): number | undefined;
  field(id: number): number | undefined;
  /** MJD (UTC, days), ascending, each once */
  readonly times: Float64Array;
  /** undefined where the file names no reference date */
  readonly clock: FlagClock | undefined;
}

export interface FlagRows {
  readonly rows: readonly FlagRow[];
  /** of the column of times: float64 where float32 cannot tell the integrations apart */
  readonly timeForm: "E" | "D";
}

/** Readers stop at this many. */
const MOST_ROWS = 1_000_000;

/** @throws CannotHoldFlags where no rows take exactly the samples selected */
export function flagRowsOf(selections: readonly ReasonedSelection[], numbers: FileNumbers): FlagRows {
  const coarse = rowsWithTimes(selections, numbers, "E");
  if (coarse !== undefined) return { rows: coarse, timeForm: "E" };
  const fine = rowsWithTimes(selections, numbers, "D");
  if (fine === undefined) {
    throw new CannotHoldFlags(
      "integrations lie closer together than the times of a flag table can tell apart",
    );
  }
  return { rows: fine, timeForm: "D" };
}

function rowsWithTimes(
  selections: readonly ReasonedSelection[],
  numbers: FileNumbers,
  form: "E" | "D",
): FlagRow[] | undefined {
  const rows: FlagRow[] = [];
  for (const { selection, reason } of selections) {
    const times = timesOf(selection, numbers, form);
    if (times === "too-coarse") return undefined;
    if (times === "none") continue;
    addRows(selection, times, reason, numbers, rows);
    if (rows.length > MOST_ROWS) {
      throw new CannotHoldFlags(`the flags take more than ${MOST_ROWS} rows of a flag table`);
    }
  }
  return rows;
}

function timesOf(
  { time }: Selection,
  { times, clock }: FileNumbers,
  form: "E" | "D",
): readonly [number, number] | "none" | "too-coarse" {
  if (time === null) return [0, 0];
  if (clock === undefined) {
    throw new CannotHoldFlags("a flag names times, and no table of the file gives a reference date");
  }
  return rangeToStore(times, time, clock, form);
}

function addRows(
  selection: Selection,
  times: readonly [number, number],
  reason: string,
  numbers: FileNumbers,
  rows: FlagRow[],
): void {
  const { shape } = numbers;
  const { subbands: wantedSubbands, polarizations: wanted } = selection;
  const subbands = Array.from({ length: shape.subbands }, (_, i) => wantedSubbands?.includes(i) ?? true);
  const polarizations = numbers.polarizations.map((name) => wanted?.includes(name) ?? true);
  if (!subbands.includes(true) || !polarizations.includes(true)) return;
  const channels = channelRanges(selection.channels, shape.channels);
  const antennas = antennaPairs(selection, numbers);
  for (const field of fieldIds(selection, numbers)) {
    for (const pair of antennas) {
      for (const range of channels) {
        rows.push({ field, antennas: pair, times, subbands, channels: range, polarizations, reason });
      }
    }
  }
}

function fieldIds({ fields }: Selection, numbers: FileNumbers): number[] {
  if (fields === null) return [0];
  return fields.flatMap((id) => named(numbers.field(id), `field ${id}`));
}

function antennaPairs({ antennas, baselines }: Selection, numbers: FileNumbers): [number, number][] {
  const antennaOf = (number: number) => named(numbers.antenna(number), `antenna ${number}`);
  if (baselines === null) {
    if (antennas === null) return [[0, 0]];
    return antennas.flatMap((number) => antennaOf(number).map((a): [number, number] => [a, 0]));
  }
  return baselines
    .filter(([a, b]) => antennas === null || antennas.includes(a) || antennas.includes(b))
    .flatMap(([a, b]) =>
      antennaOf(a).flatMap((one) => antennaOf(b).map((two): [number, number] => [one, two])),
    );
}

/** None where the file does not have it. In a table, 0 means all, and less has no meaning. */
function named(number: number | undefined, what: string): number[] {
  if (number === undefined) return [];
  if (number > 0) return [number];
  throw new CannotHoldFlags(`a flag table has no name for ${what}, whose number there would be ${number}`);
}

function channelRanges(ranges: Selection["channels"], count: number): [number, number][] {
  if (ranges === null) return [[0, 0]];
  return ranges
    .map(([low, high]): [number, number] => [Math.max(0, low) + 1, Math.min(count - 1, high) + 1])
    .filter(([low, high]) => low <= high);
}

/** The runs of true, [first, last] from 1. */
export function runsOf(mask: readonly boolean[]): [number, number][] {
  const runs: [number, number][] = [];
  mask.forEach((taken, i) => {
    if (!taken) return;
    const last = runs.at(-1);
    if (last !== undefined && last[1] === i) last[1] = i + 1;
    else runs.push([i + 1, i + 1]);
  });
  return runs;
}
