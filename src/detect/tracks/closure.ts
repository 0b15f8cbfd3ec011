/**
 * Errors of single baselines: what closure phases and amplitudes show and no antenna explains. A sky of more than a
 * point does not close either, so a baseline must stand out from all others, which then close to near nothing.
 */
import { median, robustSigma } from "../../util/statistics.ts";
import type { DetectedEvent } from "../event.ts";
import type { DetectRequest } from "../request.ts";
import { type Residuals, residualsOf } from "./closure-residuals.ts";
import type { Grid } from "./grid.ts";
import { clock, degrees, makeEvent, spanOf } from "./make-event.ts";

const THRESHOLD = 8;
const STRETCHES = 12;
const LEAST_PHASE = (4 * Math.PI) / 180;
const LEAST_GAIN = 0.08;
const FEWEST_ANTENNAS = 5;
/** What closes to within this, on this share of the baselines and stretches, is a point source but for a few faults. */
const POINT_PHASE = 0.35;
const POINT_GAIN = 0.35;
const POINT_SHARE = 0.75;
/** Extended emission shows on the shortest spacings alone. */
const SHORT_SHARE = 0.1;

export function closureFaults(grid: Grid, request: DetectRequest): DetectedEvent[] {
  if (grid.antennas.length < FEWEST_ANTENNAS) return [];
  const calibrator = request.purpose === "calibrator";
  const residuals = residualsOf(grid, stretchesOf(grid));
  // A sky that does not close would be taken for the correlator's fault.
  const fields = [...new Set(grid.segments.map(({ field }) => field))].filter(
    (field) => calibrator || looksLikeAPoint(grid, residuals, field),
  );
  const trusted = residuals.stretches.map(([start]) => fields.includes(fieldAt(grid, start)));
  if (!trusted.includes(true)) return [];
  for (let i = 0; i < residuals.phase.length; i++) {
    if (trusted[i % trusted.length]!) continue;
    residuals.phase[i] = Number.NaN;
    residuals.gain[i] = Number.NaN;
  }
  const phases = outlying(grid, residuals, residuals.phase, LEAST_PHASE, calibrator);
  const gains = outlying(grid, residuals, residuals.gain, LEAST_GAIN, calibrator);
  if (phases.length + gains.length === 0) return [];
  const apart = new Set([...phases, ...gains].map(({ baseline }) => baseline));
  // Left out of the solution, unless so many are that they hold it together.
  const fine = residualsOf(
    grid,
    Array.from(grid.times, (_, t) => [t, t + 1] as const),
    apart.size < grid.antennas.length / 2 ? apart : new Set(),
  );
  for (let t = 0; t < grid.times.length; t++) {
    if (fields.includes(fieldAt(grid, t))) continue;
    for (let b = 0; b < grid.baselines; b++) {
      fine.phase[b * grid.times.length + t] = Number.NaN;
      fine.gain[b * grid.times.length + t] = Number.NaN;
    }
  }
  const events: DetectedEvent[] = [];
  for (const one of phases) {
    const settled = settle(grid, fine.phase, fine.error, one, LEAST_PHASE, calibrator);
    if (settled !== null) events.push(eventOf(grid, settled, "deg"));
  }
  const named = new Set(events.flatMap(({ scope }) => scope.baselines!.map(String)));
  for (const one of gains) {
    const { antenna1, antenna2 } = grid.survey.baselines[one.baseline]!;
    if (named.has(String([antenna1, antenna2]))) continue;
    const settled = settle(grid, fine.gain, fine.error, one, LEAST_GAIN, calibrator);
    if (settled !== null) events.push(eventOf(grid, settled, "ratio"));
  }
  return events;
}

/** About a dozen, none across two scans. */
function stretchesOf({ times, segments }: Grid): [number, number][] {
  return segments.flatMap(({ start, end }) => {
    const n = Math.max(1, Math.round((STRETCHES * (end - start)) / times.length));
    return Array.from({ length: n }, (_, s): [number, number] => [
      start + Math.floor((s * (end - start)) / n),
      start + Math.floor(((s + 1) * (end - start)) / n),
    ]);
  });
}

function fieldAt({ segments }: Grid, t: number): number {
  return segments.find(({ start, end }) => t >= start && t < end)!.field;
}

/** Nearly all baselines close, in phase and in amplitude, and none is without signal. */
function looksLikeAPoint(grid: Grid, { phase, gain, stretches }: Residuals, field: number): boolean {
  const share = (values: Float64Array, limit: number) => {
    const own = values.filter((_, i) => fieldAt(grid, stretches[i % stretches.length]![0]) === field);
    return own.filter((x) => Math.abs(x) < limit).length / own.length;
  };
  return share(phase, POINT_PHASE) > POINT_SHARE && share(gain, POINT_GAIN) > POINT_SHARE;
}

interface Outlier {
  readonly baseline: number;
  readonly value: number;
  readonly error: number;
  readonly z: number;
}

function outlying(
  grid: Grid,
  { error, stretches }: Residuals,
  values: Float64Array,
  least: number,
  calibrator: boolean,
): Outlier[] {
  const n = stretches.length;
  const column = (s: number) => Float64Array.from({ length: grid.baselines }, (_, b) => values[b * n + s]!);
  const family = stretches.map((_, s) => robustSigma(column(s)));
  const lengths = Array.from({ length: grid.baselines }, (_, b) => spacing(grid, b));
  const short = [...lengths].sort((x, y) => x - y)[Math.floor(SHORT_SHARE * lengths.length)]!;
  const found: Outlier[] = [];
  for (let b = 0; b < grid.baselines; b++) {
    if (!calibrator && lengths[b]! < short) continue;
    const own = stretches
      .map((_, s) => ({
        value: values[b * n + s]!,
        scale: Math.max(calibrator ? 0 : family[s]!, error[b * n + s]!),
      }))
      .filter(({ value }) => !Number.isNaN(value));
    const typical = median(own.map(({ value }) => value));
    // Throughout, or in those stretches where it is at its largest.
    const out = own.filter(
      ({ value, scale }) => Math.abs(value) > least && Math.abs(value) > THRESHOLD * scale,
    );
    if (out.length === 0) continue;
    const value = median(out.map((one) => one.value));
    const alike = out.filter((one) => Math.abs(one.value - value) < Math.abs(value) / 2);
    if (alike.length < 0.75 * out.length) continue;
    // Few stretches must leave the others at rest, or it is the sky that moves.
    const rest = own.filter((one) => !out.includes(one));
    const still = rest.filter((one) => Math.abs(one.value) < Math.abs(value) / 2 + 3 * one.scale);
    if (out.length < own.length / 2 && still.length < 0.9 * rest.length) continue;
    const scale = median(alike.map((one) => one.scale)) / Math.sqrt(alike.length);
    const scatter = robustSigma(alike.map((one) => one.value)) / Math.sqrt(alike.length);
    const sigma = Math.max(scale, 1.25 * scatter);
    found.push({
      baseline: b,
      value: out.length === own.length ? typical : value,
      error: sigma,
      z: Math.abs(value) / sigma,
    });
  }
  return found;
}

function spacing(grid: Grid, b: number): number {
  const { tracks } = grid.survey;
  const [first, last] = [tracks.firstCell[b]!, tracks.firstCell[b + 1]!];
  const middle = Math.floor((first + last) / 2);
  return middle < last ? Math.hypot(tracks.u[middle]!, tracks.v[middle]!) : Number.NaN;
}

/** Quiet before and after, and nearly all other baselines quiet at the time: a changing sky moves many. */
function standsAlone(
  values: Float64Array,
  { baseline, value }: Outlier,
  n: number,
  start: number,
  end: number,
) {
  const own = values.subarray(baseline * n, (baseline + 1) * n);
  const outside = [...own.subarray(0, start), ...own.subarray(end)].filter((x) => !Number.isNaN(x));
  const loud = outside.filter((x) => Math.abs(x) > Math.abs(value) / 2).length;
  const others = Array.from({ length: values.length / n }, (_, b) =>
    b === baseline ? Number.NaN : Math.abs(median(values.subarray(b * n + start, b * n + end))),
  ).filter((x) => !Number.isNaN(x));
  const moved = others.filter((x) => x > Math.abs(value) / 4).length;
  return loud <= 0.1 * outside.length && moved <= 0.1 * others.length;
}

interface Settled extends Outlier {
  readonly run: readonly [number, number];
}

/** A shorter one may be a passing source, which fades as quickly. */
const FEWEST_INTEGRATIONS = 6;
/** Integrations on either side of an edge that must show it. */
const EDGE = 3;

/** The same integration by integration; null where it comes and goes like a sky rather than like a fault. */
function settle(
  grid: Grid,
  values: Float64Array,
  errors: Float64Array,
  one: Outlier,
  least: number,
  calibrator: boolean,
): Settled | null {
  const n = grid.times.length;
  const own = values.subarray(one.baseline * n, (one.baseline + 1) * n);
  const noise = median(errors.subarray(one.baseline * n, (one.baseline + 1) * n));
  const [start, end] = bestRun(own, one.value);
  if (!calibrator && end - start < Math.min(FEWEST_INTEGRATIONS, n)) return null;
  if (!calibrator && !standsAlone(values, one, n, start, end)) return null;
  const inside = own.subarray(start, end).filter((x) => !Number.isNaN(x));
  if (inside.length === 0) return null;
  const value = median(inside);
  const scatter = robustSigma(inside);
  const error = Math.max(one.error, (1.25 * Math.max(scatter, noise || 0)) / Math.sqrt(inside.length));
  const z = Math.abs(value) / error;
  if (!(Math.abs(value) > least && z > THRESHOLD)) return null;
  if (scatter > Math.abs(value) / 4 + 1.5 * noise) return null;
  const step = (at: number) =>
    Math.abs(median(own.subarray(Math.max(0, at - EDGE), at)) - median(own.subarray(at, at + EDGE)));
  for (const edge of [start, end]) {
    if (edge > 0 && edge < n && step(edge) < 0.6 * Math.abs(value)) return null;
  }
  return { ...one, value, error, z, run: [start, end] };
}

function eventOf(
  grid: Grid,
  { baseline, value, error, z, run }: Settled,
  unit: "deg" | "ratio",
): DetectedEvent {
  const { antenna1, antenna2 } = grid.survey.baselines[baseline]!;
  const time = spanOf(grid, run[0], run[1]);
  const size = unit === "deg" ? degrees(value) : Math.exp(value);
  const sizeError = unit === "deg" ? degrees(error) : size * error;
  const what =
    unit === "deg"
      ? `${size.toFixed(1)} +- ${sizeError.toFixed(1)} deg in phase`
      : `a factor of ${size.toFixed(2)} +- ${sizeError.toFixed(2)} in amplitude`;
  const when =
    time === null
      ? "all the time"
      : `from ${clock(grid.times[run[0]]!)} to ${clock(grid.times[run[1] - 1]!)} UTC`;
  return makeEvent(grid, {
    kind: "closure",
    cause: "correlator",
    scope: { baselines: [[antenna1, antenna2]], time },
    size,
    sizeError,
    unit,
    significance: z,
    evidence:
      `Baseline ${antenna1}-${antenna2} is out by ${what} ${when}: ` +
      `its triangles do not close, those without it do, and no antenna explains it.`,
  });
}

/** The run of integrations [start, end) that a step of this size to and back from fits best. */
function bestRun(values: Float64Array, size: number): [number, number] {
  let best: [number, number] = [0, values.length];
  let most = 0;
  let sum = 0;
  let start = 0;
  for (let t = 0; t < values.length; t++) {
    // Squares of the residuals without the step less those with it.
    sum += Number.isNaN(values[t]!) ? 0 : size * (2 * values[t]! - size);
    if (sum <= 0) {
      sum = 0;
      start = t + 1;
    } else if (sum > most) {
      most = sum;
      best = [start, t + 1];
    }
  }
  return best;
}
