/** Integrations from the times of the rows, which may be a float32 step apart, and the scans they make up. */
import { SECONDS_PER_DAY } from "../util/constants.ts";
import { median } from "../util/statistics.ts";
import type { Survey } from "./survey-result.ts";
import { TIME_STEP_DAYS, type Visits } from "./time-order.ts";
import type { TracksWithoutScans } from "./track-columns.ts";

/** A scan ends at a gap of this many integrations and this many seconds. */
const GAP_INTEGRATIONS = 5;
const GAP_SECONDS = 60;

/** The integrations of the array. All MJD, ascending. */
export interface Integrations {
  /** middle of the earliest and the latest time of its rows */
  readonly centre: Float64Array;
  readonly earliest: Float64Array;
  readonly latest: Float64Array;
}

/** @param integration  seconds, NaN unknown */
export function integrationsOf(fields: readonly Visits[], integration: number): Integrations {
  const all = fields.map(({ times }) => times.sorted);
  const times = new Float64Array(all.reduce((sum, { length }) => sum + length, 0));
  let at = 0;
  for (const some of all) {
    times.set(some, at);
    at += some.length;
  }
  times.sort();
  const tolerance = toleranceFor(integration);
  const earliest: number[] = [];
  const latest: number[] = [];
  for (const time of times) {
    if (time - (earliest.at(-1) ?? Number.NEGATIVE_INFINITY) <= tolerance) latest[latest.length - 1] = time;
    else {
      earliest.push(time);
      latest.push(time);
    }
  }
  return {
    centre: Float64Array.from(earliest, (time, i) => (time + latest[i]!) / 2),
    earliest: Float64Array.from(earliest),
    latest: Float64Array.from(latest),
  };
}

/** How far apart the rows of one integration may be, days: a float32 step, and never half an integration. */
function toleranceFor(integration: number): number {
  return integration > 0 ? Math.min(TIME_STEP_DAYS, integration / 2.5 / SECONDS_PER_DAY) : TIME_STEP_DAYS;
}

/** Typical integration time, seconds: what most rows say, else the typical spacing of times; NaN of a single time. */
export function typicalIntegration(said: number, centre: Float64Array): number {
  if (said > 0) return said;
  const steps = new Float64Array(Math.max(0, centre.length - 1));
  for (let i = 0; i < steps.length; i++) steps[i] = (centre[i + 1]! - centre[i]!) * SECONDS_PER_DAY;
  return median(steps);
}

/** Index of the integration nearest to a time; -1 where the time is not a number or there is none. */
export function nearestTime(times: Float64Array, time: number): number {
  if (times.length === 0 || Number.isNaN(time)) return -1;
  let low = 0;
  let high = times.length - 1;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (times[middle]! < time) low = middle + 1;
    else high = middle;
  }
  return low > 0 && time - times[low - 1]! < times[low]! - time ? low - 1 : low;
}

interface Scan {
  readonly start: number;
  end: number;
  readonly field: number;
  readonly subarray: number;
}

export interface Scans {
  readonly scans: Survey["scans"];
  /** (cells) index of the scan */
  readonly ofCell: Int32Array;
}

/** Runs of integrations of a sub-array on one field, without another field or a long gap between them. */
export function findScans(
  fields: readonly Visits[],
  { centre, earliest, latest }: Integrations,
  integration: number,
  tracks: TracksWithoutScans,
): Scans {
  const longest = longestPause(integration) / SECONDS_PER_DAY;
  const scans: Scan[] = [];
  for (const subarray of new Set(fields.map((visits) => visits.subarray))) {
    const own = fields.filter((visits) => visits.subarray === subarray);
    let open = new Map<number, { scan: Scan; last: number }>();
    for (const { integration: k, fields: here } of fieldsInTime(own, centre)) {
      // A field that is not observed now ends its scan; several at once each go on with theirs.
      const still: typeof open = new Map();
      for (const field of here) {
        const before = open.get(field);
        const goesOn = before !== undefined && centre[k]! - centre[before.last]! <= longest;
        const scan = goesOn ? before.scan : { start: earliest[k]!, end: latest[k]!, field, subarray };
        if (!goesOn) scans.push(scan);
        scan.end = latest[k]!;
        still.set(field, { scan, last: k });
      }
      open = still;
    }
  }
  scans.sort((a, b) => a.start - b.start || a.end - b.end || a.subarray - b.subarray || a.field - b.field);
  return {
    scans: scans.map(({ start, end, field }) => ({ start, end, field })),
    ofCell: scanOfCells(tracks, scans),
  };
}

/** Seconds without data that end a scan. */
export function longestPause(integration: number): number {
  return Math.max(GAP_SECONDS, GAP_INTEGRATIONS * (integration || 0));
}

/** The integrations of a sub-array, ascending, and the fields observed in each. */
function fieldsInTime(own: readonly Visits[], centre: Float64Array) {
  const observed = new Map<number, number[]>();
  for (const { field, times } of own) {
    for (const time of times.sorted) {
      const k = nearestTime(centre, time);
      const fields = observed.get(k);
      if (fields === undefined) observed.set(k, [field]);
      else if (!fields.includes(field)) fields.push(field);
    }
  }
  return [...observed]
    .sort(([a], [b]) => a - b)
    .map(([index, fields]) => ({ integration: index, fields: fields.sort((a, b) => a - b) }));
}

function scanOfCells(
  { cells, time, field, subarray }: TracksWithoutScans,
  scans: readonly Scan[],
): Int32Array {
  const own = new Map<string, number[]>();
  for (const [index, scan] of scans.entries()) {
    const key = `${scan.subarray} ${scan.field}`;
    own.set(key, [...(own.get(key) ?? []), index]);
  }
  const ofCell = new Int32Array(cells);
  let list: readonly number[] = [];
  let place = 0;
  for (let cell = 0; cell < cells; cell++) {
    const before = cell - 1;
    if (
      cell === 0 ||
      field[cell] !== field[before] ||
      subarray[cell] !== subarray[before] ||
      time[cell]! < time[before]!
    ) {
      list = own.get(`${subarray[cell]} ${field[cell]}`) ?? [];
      place = 0;
    }
    while (place + 1 < list.length && scans[list[place + 1]!]!.start <= time[cell]!) place++;
    ofCell[cell] = list[place]!;
  }
  return ofCell;
}
