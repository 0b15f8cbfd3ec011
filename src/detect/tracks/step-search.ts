/**
 * Steps of antenna phases in time without a model of the sky: the mean visibility of a window after each instant against
 * that of a window before it, R L*, solved for antennas.
 */
import { median, robustSigma } from "../../util/statistics.ts";
import { antennaGains, type BaselineRatios } from "./antenna-gains.ts";
import { type AntennaPhases, antennaPhases, LEAST_VARIANCE } from "./antenna-phases.ts";
import type { Grid } from "./grid.ts";

/** Complex series, (times x baselines), that turn with the antennas like visibilities do. */
export interface Series {
  readonly subband: number;
  readonly product: number;
  readonly real: Float32Array;
  readonly imag: Float32Array;
  /** of the real or the imaginary part */
  readonly variance: Float32Array;
}

/** Integrations of each window. */
export const WINDOWS: readonly number[] = [1, 2, 4, 8, 16, 32];

/** Phase steps at every instant; (instants x antennas). An instant t lies before integration t. */
export interface Steps {
  readonly window: number;
  /** from one scan to the next of its field, rather than within scans */
  readonly across: boolean;
  readonly phase: Float32Array;
  readonly error: Float32Array;
  readonly agreement: Float32Array;
  /** 1 where a step was looked at and is none */
  readonly barred: Uint8Array;
  /** (antennas) robust sigma of the steps of the antenna, at least that of the array: noise and wander both */
  readonly scale: Float64Array;
}

/** Solves a step between two ranges of integrations [start, end) for antennas; thorough: for its exact size. */
export type Solver = (
  grid: Grid,
  series: readonly Series[],
  left: readonly [number, number],
  right: readonly [number, number],
  thorough?: boolean,
) => AntennaPhases;

/** Steps over one window for the sum of some series. */
export function stepsOf(
  grid: Grid,
  series: readonly Series[],
  window: number,
  solve: Solver,
  across = false,
): Steps {
  const { times, antennas } = grid;
  const size = times.length * antennas.length;
  const steps = {
    window,
    across,
    phase: new Float32Array(size).fill(Number.NaN),
    error: new Float32Array(size).fill(Number.NaN),
    agreement: new Float32Array(size),
    barred: new Uint8Array(size),
    scale: new Float64Array(antennas.length),
  };
  fillSteps(grid, series, steps, solve, [0, times.length]);
  fillScale(steps, antennas.length);
  return steps;
}

/** Long windows change little from one instant to the next. */
function strideOf(window: number): number {
  return Math.max(1, window / 4);
}

/** Fill instants [from, to) anew: every one, or those that the window's stride keeps, and NaN between. */
export function fillSteps(
  grid: Grid,
  series: readonly Series[],
  steps: Steps,
  solve: Solver,
  [from, to]: readonly [number, number],
  every = false,
): void {
  const antennas = grid.antennas.length;
  const { window } = steps;
  const keep = (t: number, solved: AntennaPhases) => {
    steps.phase.set(solved.phase, t * antennas);
    steps.error.set(solved.error, t * antennas);
    steps.agreement.set(solved.agreement, t * antennas);
  };
  if (steps.across) {
    for (const { start } of grid.segments) {
      const sides = start >= from && start < to ? sidesOf(grid, start, window) : null;
      if (sides !== null) keep(start, solve(grid, series, ...sides));
    }
    return;
  }
  const stride = every ? 1 : strideOf(window);
  for (const segment of grid.segments) {
    const last = Math.min(to, segment.end - window + 1);
    for (let t = Math.max(from, segment.start + window); t < last; t++) {
      if ((t - segment.start - window) % stride !== 0) {
        steps.phase.fill(Number.NaN, t * antennas, (t + 1) * antennas);
        continue;
      }
      keep(t, solve(grid, series, [t - window, t], [t, t + window]));
    }
  }
}

/** The integrations on either side of an instant, within its scan or, at its start, in the scan before of its field. */
export function sidesOf(
  grid: Grid,
  at: number,
  window: number,
): readonly [readonly [number, number], readonly [number, number]] | null {
  const place = grid.segments.findIndex(({ start, end }) => at >= start && at < end);
  const segment = grid.segments[place]!;
  const right = [at, Math.min(segment.end, at + window)] as const;
  if (at > segment.start) return [[Math.max(segment.start, at - window), at], right];
  const before = grid.segments.slice(0, place).findLast(({ field }) => field === segment.field);
  return before === undefined ? null : [[Math.max(before.start, before.end - window), before.end], right];
}

/** Antenna phases of the mean of one range of integrations over that of another. */
export const phaseStep: Solver = (grid, series, left, right, thorough) =>
  antennaPhases(stepPhasors(grid, series, left, right), grid.antennas.length, thorough);

/** Antenna gains, as natural logarithms, of the one over the other. */
export const gainStep: Solver = (grid, series, left, right, thorough) =>
  antennaGains(stepRatios(grid, series, left, right), grid.antennas.length, thorough);

function stepRatios(
  grid: Grid,
  series: readonly Series[],
  left: readonly [number, number],
  right: readonly [number, number],
): BaselineRatios {
  const { baselines } = grid;
  const value = new Float64Array(baselines);
  const weight = new Float64Array(baselines);
  const l: Mean = { re: 0, im: 0, variance: 0 };
  const r: Mean = { re: 0, im: 0, variance: 0 };
  for (let b = 0; b < baselines; b++) {
    let [sum, total] = [0, 0];
    for (const one of series) {
      if (!meanOf(one, baselines, b, left, l) || !meanOf(one, baselines, b, right, r)) continue;
      const powerL = l.re * l.re + l.im * l.im - 2 * l.variance;
      const powerR = r.re * r.re + r.im * r.im - 2 * r.variance;
      // Below 4 sigma an amplitude is more noise than signal, and its logarithm no normal variable.
      if (powerL < 16 * l.variance || powerR < 16 * r.variance) continue;
      const w = 1 / Math.max(LEAST_VARIANCE, l.variance / powerL + r.variance / powerR);
      sum += (w * Math.log(powerR / powerL)) / 2;
      total += w;
    }
    if (total > 0) value[b] = sum / total;
    weight[b] = total;
  }
  return { first: grid.first, second: grid.second, value, weight };
}

export function stepPhasors(
  grid: Grid,
  series: readonly Series[],
  left: readonly [number, number],
  right: readonly [number, number],
) {
  const { baselines } = grid;
  const real = new Float64Array(baselines);
  const imag = new Float64Array(baselines);
  const weight = new Float64Array(baselines);
  const l: Mean = { re: 0, im: 0, variance: 0 };
  const r: Mean = { re: 0, im: 0, variance: 0 };
  for (let b = 0; b < baselines; b++) {
    let [re, im, spread] = [0, 0, 0];
    for (const one of series) {
      if (!meanOf(one, baselines, b, left, l) || !meanOf(one, baselines, b, right, r)) continue;
      const scale = 1 / (l.variance + r.variance) ** 2;
      re += scale * (r.re * l.re + r.im * l.im);
      im += scale * (r.im * l.re - r.re * l.im);
      const [powerL, powerR] = [l.re * l.re + l.im * l.im, r.re * r.re + r.im * r.im];
      // Powers hold noise of twice the variance.
      spread +=
        scale *
        scale *
        Math.max(
          powerL * r.variance + powerR * l.variance - 2 * l.variance * r.variance,
          2 * l.variance * r.variance,
        );
    }
    real[b] = re;
    imag[b] = im;
    const power = re * re + im * im - spread;
    weight[b] = power > 0 ? 1 / Math.max(LEAST_VARIANCE, spread / power) : 0;
  }
  return { first: grid.first, second: grid.second, real, imag, weight };
}

interface Mean {
  re: number;
  im: number;
  variance: number;
}

function meanOf(
  one: Series,
  baselines: number,
  b: number,
  [start, end]: readonly [number, number],
  into: Mean,
): boolean {
  let [re, im, variance, n] = [0, 0, 0, 0];
  for (let t = start; t < end; t++) {
    const value = one.real[t * baselines + b]!;
    if (Number.isNaN(value)) continue;
    re += value;
    im += one.imag[t * baselines + b]!;
    variance += one.variance[t * baselines + b]!;
    n += 1;
  }
  if (n === 0 || !(variance > 0)) return false;
  into.re = re / n;
  into.im = im / n;
  into.variance = variance / (n * n);
  return true;
}

function fillScale(steps: Steps, antennas: number): void {
  const own = Array.from({ length: antennas }, (_, a) => {
    const values: number[] = [];
    for (let i = a; i < steps.phase.length; i += antennas) {
      const value = steps.phase[i]!;
      // The median antenna of an instant stands at 0 by construction.
      if (!Number.isNaN(value) && value !== 0) values.push(value);
    }
    return values;
  });
  const spread = own.map((values) =>
    values.length < FEWEST ? Number.NaN : Math.hypot(robustSigma(values), median(values)),
  );
  const known = spread.filter((value) => !Number.isNaN(value)).length;
  // With few instants, what all antennas do at them.
  const typical = known > antennas / 2 ? median(spread) : pooledSigma(own.flat());
  for (let a = 0; a < antennas; a++) {
    steps.scale[a] = Number.isNaN(typical) ? Number.NaN : Math.max(typical, spread[a] || 0);
  }
}

/** Instants that tell an antenna's own scale. */
const FEWEST = 4;
const FEWEST_POOLED = 8;

/** Steps are about the median antenna already. */
function pooledSigma(values: readonly number[]): number {
  return values.length < FEWEST_POOLED ? Number.NaN : 1.4826 * median(values.map(Math.abs));
}

/** Windows on either side that tell how quickly things move at the time. */
const LOCAL_WINDOWS = 6;

/** The same against what the antenna and the others do in the neighbourhood too. */
export function localSignificance(steps: Steps, antennas: number, t: number, a: number): number {
  if (steps.across) return significanceOf(steps, antennas, t, a);
  const reach = LOCAL_WINDOWS * Math.max(2, steps.window);
  const own: number[] = [];
  const array: number[] = [];
  for (let s = t - reach; s <= t + reach; s++) {
    if (s < 0 || s * antennas >= steps.phase.length) continue;
    for (let other = 0; other < antennas; other++) {
      const value = Math.abs(steps.phase[s * antennas + other]!);
      if (Number.isNaN(value)) continue;
      if (other === a) {
        if (Math.abs(s - t) > steps.window) own.push(value);
      } else if (Math.abs(s - t) <= steps.window) array.push(value);
    }
  }
  const scale = 1.4826 * Math.max(own.length < 4 ? 0 : median(own), array.length < 4 ? 0 : median(array));
  const phase = Math.abs(steps.phase[t * antennas + a]!);
  return Math.min(
    significanceOf(steps, antennas, t, a),
    scale > 0 ? phase / scale : Number.POSITIVE_INFINITY,
  );
}

/** How far a step is out of family and above its error, sigmas; 0 where unknown. */
export function significanceOf(steps: Steps, antennas: number, t: number, a: number): number {
  const at = t * antennas + a;
  const phase = Math.abs(steps.phase[at]!);
  const scale = Math.max(steps.scale[a]!, steps.error[at]!);
  return phase > 0 && scale > 0 ? phase / scale : 0;
}
