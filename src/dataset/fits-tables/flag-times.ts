/**
 * Times of a flag table: stored as days from a reference date, often as float32, so that readers widen them by one step
 * of what holds them. What is written is chosen so that the widened range takes the same integrations as the one meant.
 */
import { SECONDS_PER_DAY } from "../../util/constants.ts";

/** Relative step of the stored days, by the form of the column. */
export const TIME_STEP: Readonly<Record<"E" | "D", number>> = { E: 2 ** -23, D: 2 ** -52 };

export interface FlagClock {
  /** MJD of 0h of the reference date in the file's time system */
  readonly referenceDay: number;
  /** the file's time - UTC, days */
  readonly timeOffset: number;
}

/** MJD (UTC, days) of a stored range, widened by one step. */
export function rangeFromStored(
  [start, end]: readonly [number, number],
  clock: FlagClock,
  form: "E" | "D",
): [number, number] {
  const step = TIME_STEP[form];
  const { referenceDay, timeOffset } = clock;
  return [
    referenceDay + start - Math.abs(start) * step - timeOffset,
    referenceDay + end + Math.abs(end) * step - timeOffset,
  ];
}

/** Integrations at the ends of a range: those just inside it and just outside. */
interface Ends {
  /** MJD; -Infinity: none */
  readonly before: number;
  readonly first: number;
  readonly last: number;
  /** MJD; Infinity: none */
  readonly after: number;
}

/** @returns undefined where no integration lies inside */
function endsOf(times: Float64Array, [start, end]: readonly [number, number]): Ends | undefined {
  const first = countBelow(times, start, false);
  const after = countBelow(times, end, true);
  if (first >= after) return undefined;
  return {
    before: times[first - 1] ?? Number.NEGATIVE_INFINITY,
    first: times[first]!,
    last: times[after - 1]!,
    after: times[after] ?? Number.POSITIVE_INFINITY,
  };
}

/** How many of the ascending times are below `time`, or at it as well. */
function countBelow(times: Float64Array, time: number, orAt: boolean): number {
  let low = 0;
  let high = times.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (times[middle]! < time || (orAt && times[middle] === time)) low = middle + 1;
    else high = middle;
  }
  return low;
}

/** At most this far from the integrations inside, where nothing nearer bounds the range. */
const MOST_REACH = 0.5 / SECONDS_PER_DAY;

/**
 * The range to store: between integrations, where rounding cannot carry it over one.
 *
 * @param times  MJD (UTC, days) of the integrations, ascending
 * @param form   of the column
 * @returns "none" where no integration lies inside; "too-coarse" where the form cannot tell the integrations apart
 */
export function rangeToStore(
  times: Float64Array,
  range: readonly [number, number],
  clock: FlagClock,
  form: "E" | "D",
): [number, number] | "none" | "too-coarse" {
  const ends = endsOf(times, range);
  if (ends === undefined) return "none";
  const { before, first, last, after } = ends;
  const { referenceDay, timeOffset } = clock;
  const rounded = (mjd: number) => {
    const days = mjd - referenceDay + timeOffset;
    return form === "E" ? Math.fround(days) : days;
  };
  const stored: [number, number] = [
    rounded(Math.max((before + first) / 2, first - MOST_REACH)),
    rounded(Math.min((last + after) / 2, last + MOST_REACH)),
  ];
  // Both zero would mean all times.
  if (stored[0] === 0 && stored[1] === 0) return "too-coarse";
  const [start, end] = rangeFromStored(stored, clock, form);
  const same = start > before && start <= first && end >= last && end < after;
  return same ? stored : "too-coarse";
}
