/** Scans: runs of integrations on one field without a long break. */
import { median } from "../util/statistics.ts";
import type { Survey } from "./survey-result.ts";
import { TIME_STEP_DAYS } from "./time-order.ts";

const SECONDS_A_DAY = 86_400;
/** A scan ends at a gap of this many integrations and this many seconds. */
const GAP_INTEGRATIONS = 5;
const GAP_SECONDS = 60;

/** Typical integration time, seconds: the median of what rows say, else of the spacing of times; NaN of a single time. */
export function typicalIntegration(integration: Float32Array, times: Float64Array): number {
  const said = median(integration.filter((seconds) => seconds > 0));
  if (said > 0) return said;
  const steps = Float64Array.from(
    { length: Math.max(0, times.length - 1) },
    (_, i) => times[i + 1]! - times[i]!,
  );
  return median(steps) * SECONDS_A_DAY;
}

/** What splits times into scans: the field of each of the array's integrations. */
interface FieldTime {
  readonly time: number;
  readonly field: number;
}

export interface Scans {
  readonly scans: Survey["scans"];
  /** (cells) */
  readonly ofCell: Int32Array;
}

/**
 * @param time   (cells) MJD; a cell whose time is not a number belongs to scan -1
 * @param field  (cells)
 */
export function findScans(time: Float64Array, field: Int32Array, integrationSeconds: number): Scans {
  const longest = Math.max(GAP_SECONDS, GAP_INTEGRATIONS * (integrationSeconds || 0)) / SECONDS_A_DAY;
  const scans: { start: number; end: number; field: number }[] = [];
  for (const at of fieldTimes(time, field)) {
    // Sub-arrays may observe different fields at once: a scan goes on with its own field.
    const open = scans.findLast((scan) => scan.field === at.field);
    const last = scans.at(-1);
    const goesOn =
      open !== undefined && at.time - open.end <= longest && (open === last || overlaps(open, last!, at));
    if (goesOn) open.end = at.time;
    else scans.push({ start: at.time, end: at.time, field: at.field });
  }
  return { scans, ofCell: scanOfCells(time, field, scans) };
}

/** Another field began meanwhile, but while this one went on: not a change of field. */
function overlaps(open: { end: number }, last: { start: number }, at: FieldTime): boolean {
  return open.end >= last.start - TIME_STEP_DAYS && at.time >= last.start;
}

/** Distinct (time, field), by time, then field. */
function fieldTimes(time: Float64Array, field: Int32Array): FieldTime[] {
  const seen = new Map<string, FieldTime>();
  for (let cell = 0; cell < time.length; cell++) {
    if (Number.isNaN(time[cell])) continue;
    const step = Math.round(time[cell]! / TIME_STEP_DAYS);
    const key = `${step} ${field[cell]}`;
    const known = seen.get(key);
    if (known === undefined || time[cell]! < known.time)
      seen.set(key, { time: time[cell]!, field: field[cell]! });
  }
  return [...seen.values()].sort((a, b) => a.time - b.time || a.field - b.field);
}

function scanOfCells(time: Float64Array, field: Int32Array, scans: Survey["scans"]): Int32Array {
  const byField = new Map<number, number[]>();
  for (const [scan, { field: id }] of scans.entries()) byField.set(id, [...(byField.get(id) ?? []), scan]);
  return Int32Array.from(time, (at, cell) => {
    const own = byField.get(field[cell]!) ?? [];
    let low = 0;
    let high = own.length;
    while (low < high) {
      const middle = (low + high) >>> 1;
      if (scans[own[middle]!]!.start <= at + TIME_STEP_DAYS) low = middle + 1;
      else high = middle;
    }
    return low === 0 || Number.isNaN(at) ? -1 : own[low - 1]!;
  });
}
