/** Antenna phases from baseline phases, robustly, without a reference antenna. */
import { median } from "../../util/statistics.ts";

/** Baseline phasors of one interval; arrays by baseline. */
export interface BaselinePhasors {
  readonly first: Int32Array;
  readonly second: Int32Array;
  readonly real: Float64Array;
  readonly imag: Float64Array;
  /** 1 / variance of the phase; 0: not measured */
  readonly weight: Float64Array;
}

/** Arrays by antenna; radians. */
export interface AntennaPhases {
  /** NaN where no baseline tells */
  readonly phase: Float64Array;
  /** 1 sigma by noise and by how well the antenna's baselines agree */
  readonly error: Float64Array;
  /** share of the antenna's weight whose residual is below 3 sigma or half of the phase */
  readonly agreement: Float64Array;
}

const SWEEPS = 10;
/** Sweeps after which the weights of what disagrees are lowered; thorough: so that one baseline leaves its antennas alone. */
const LOWER: ReadonlySet<number> = new Set([2, 5]);
const THOROUGH_SWEEPS = 20;
/** No phase is trusted beyond this variance (0.2 deg)^2: structure and tracks are not that smooth. */
export const LEAST_VARIANCE = 1.2e-5;

/**
 * phi_ij = phi_i - phi_j by the phasor iteration g_i <- sum_j w_ij X_ij g_j, each antenna in turn, |g| = 1, with the
 * weights of baselines that disagree lowered.
 * @see Thompson & D'Addario 1982, Radio Sci. 17, 357
 */
export function antennaPhases(phasors: BaselinePhasors, antennas: number, thorough = false): AntennaPhases {
  const { first, second, real, imag, weight } = phasors;
  const baselines = first.length;
  const gr = new Float64Array(antennas).fill(1);
  const gi = new Float64Array(antennas);
  const sumR = new Float64Array(antennas);
  const sumI = new Float64Array(antennas);
  const total = new Float64Array(antennas);
  const trust = new Float64Array(baselines);
  const ur = new Float64Array(baselines);
  const ui = new Float64Array(baselines);
  for (let b = 0; b < baselines; b++) {
    const size = Math.hypot(real[b]!, imag[b]!);
    if (!(weight[b]! > 0) || !(size > 0)) continue;
    trust[b] = weight[b]!;
    ur[b] = real[b]! / size;
    ui[b] = imag[b]! / size;
  }
  const sweeps = thorough ? THOROUGH_SWEEPS : SWEEPS;
  for (let sweep = 0; sweep < sweeps; sweep++) {
    sumR.fill(0);
    sumI.fill(0);
    for (let b = 0; b < baselines; b++) {
      const w = trust[b]!;
      if (w === 0) continue;
      const [i, j] = [first[b]!, second[b]!];
      sumR[i]! += w * (ur[b]! * gr[j]! - ui[b]! * gi[j]!);
      sumI[i]! += w * (ur[b]! * gi[j]! + ui[b]! * gr[j]!);
      sumR[j]! += w * (ur[b]! * gr[i]! + ui[b]! * gi[i]!);
      sumI[j]! += w * (ur[b]! * gi[i]! - ui[b]! * gr[i]!);
    }
    for (let a = 0; a < antennas; a++) {
      // In the first sweep the new value stands alone: half of +1 and -1 is nothing.
      const keep = sweep === 0 ? 0 : 0.5;
      const size = Math.hypot(sumR[a]!, sumI[a]!);
      if (!(size > 0)) continue;
      const re = keep * gr[a]! + ((1 - keep) * sumR[a]!) / size;
      const im = keep * gi[a]! + ((1 - keep) * sumI[a]!) / size;
      const norm = Math.hypot(re, im);
      if (!(norm > 0)) continue;
      gr[a] = re / norm;
      gi[a] = im / norm;
    }
    if (thorough ? sweep >= 2 && sweep < sweeps - 2 : LOWER.has(sweep))
      lowerOutliers(phasors, trust, ur, ui, gr, gi);
  }
  return phasesOf(phasors, antennas, ur, ui, gr, gi, { sumR, sumI, total });
}

function residual(
  b: number,
  p: BaselinePhasors,
  ur: Float64Array,
  ui: Float64Array,
  gr: Float64Array,
  gi: Float64Array,
) {
  const [i, j] = [p.first[b]!, p.second[b]!];
  // X g_i* g_j
  const mr = gr[i]! * gr[j]! + gi[i]! * gi[j]!;
  const mi = gi[i]! * gr[j]! - gr[i]! * gi[j]!;
  return Math.atan2(ui[b]! * mr - ur[b]! * mi, ur[b]! * mr + ui[b]! * mi);
}

function lowerOutliers(
  p: BaselinePhasors,
  trust: Float64Array,
  ur: Float64Array,
  ui: Float64Array,
  gr: Float64Array,
  gi: Float64Array,
): void {
  const scaled: number[] = [];
  for (let b = 0; b < trust.length; b++) {
    if (!(trust[b]! > 0)) continue;
    scaled.push(distance(b, p, ur, ui, gr, gi) * Math.sqrt(p.weight[b]!));
  }
  const scale = 2.5 * Math.max(1, 1.4826 * median(scaled));
  let next = 0;
  for (let b = 0; b < trust.length; b++) {
    if (!(trust[b]! > 0)) continue;
    const z = scaled[next++]! / scale;
    trust[b] = Math.max(1e-12, p.weight[b]! / (1 + z * z));
  }
}

/** Chord between a baseline's phasor and that of its antennas: the angle, where it is small. */
function distance(
  b: number,
  p: BaselinePhasors,
  ur: Float64Array,
  ui: Float64Array,
  gr: Float64Array,
  gi: Float64Array,
): number {
  const [i, j] = [p.first[b]!, p.second[b]!];
  const mr = gr[i]! * gr[j]! + gi[i]! * gi[j]!;
  const mi = gi[i]! * gr[j]! - gr[i]! * gi[j]!;
  return Math.hypot(ur[b]! - mr, ui[b]! - mi);
}

interface Room {
  readonly sumR: Float64Array;
  readonly sumI: Float64Array;
  readonly total: Float64Array;
}

function phasesOf(
  p: BaselinePhasors,
  antennas: number,
  ur: Float64Array,
  ui: Float64Array,
  gr: Float64Array,
  gi: Float64Array,
  { sumR, total }: Room,
): AntennaPhases {
  const phase = new Float64Array(antennas).fill(Number.NaN);
  const error = new Float64Array(antennas).fill(Number.NaN);
  const agreement = new Float64Array(antennas);
  const count = new Float64Array(antennas);
  sumR.fill(0);
  total.fill(0);
  for (let b = 0; b < p.first.length; b++) {
    const w = p.weight[b]!;
    if (!(w > 0) || (ur[b] === 0 && ui[b] === 0)) continue;
    const delta = residual(b, p, ur, ui, gr, gi);
    for (const a of [p.first[b]!, p.second[b]!]) {
      total[a]! += w;
      sumR[a]! += w * Math.min(delta * delta, 10 / w + 0.1);
      count[a]! += 1;
    }
  }
  for (let a = 0; a < antennas; a++) if (total[a]! > 0) phase[a] = Math.atan2(gi[a]!, gr[a]!);
  recentre(phase);
  for (let b = 0; b < p.first.length; b++) {
    const w = p.weight[b]!;
    if (!(w > 0) || (ur[b] === 0 && ui[b] === 0)) continue;
    const delta = Math.abs(residual(b, p, ur, ui, gr, gi));
    for (const a of [p.first[b]!, p.second[b]!]) {
      if (delta * delta * w < 9 || delta < 0.5 * Math.abs(phase[a]!)) agreement[a]! += w / total[a]!;
    }
  }
  discountLone(p, total, agreement);
  for (let a = 0; a < antennas; a++) {
    if (!(total[a]! > 0)) continue;
    const reduced = sumR[a]! / Math.max(1, count[a]! - 1);
    error[a] = Math.sqrt(Math.max(1, reduced) / total[a]!);
  }
  return { phase, error, agreement };
}

/** An antenna told by next to one baseline alone cannot be told from it; with three antennas there is no choice. */
const FEWEST_EFFECTIVE = 1.5;

/** Agreement of antennas whose weight rests on fewer baselines is set to 0. */
export function discountLone(
  { first, second, weight }: Pick<BaselinePhasors, "first" | "second" | "weight">,
  total: Float64Array,
  agreement: Float64Array,
): void {
  if (total.length <= 3) return;
  const squares = new Float64Array(total.length);
  for (let b = 0; b < first.length; b++) {
    squares[first[b]!]! += weight[b]! ** 2;
    squares[second[b]!]! += weight[b]! ** 2;
  }
  for (let a = 0; a < total.length; a++) {
    if (total[a]! ** 2 < FEWEST_EFFECTIVE * squares[a]!) agreement[a] = 0;
  }
}

/** The median antenna stands still: so one antenna's turn is not that of all others. */
export function recentre(phase: Float64Array): void {
  let c = 0;
  let s = 0;
  for (const value of phase) {
    if (Number.isNaN(value)) continue;
    c += Math.cos(value);
    s += Math.sin(value);
  }
  const turned = phase.map((value) => wrap(value - Math.atan2(s, c)));
  const middle = median(turned);
  for (let a = 0; a < phase.length; a++) phase[a] = wrap(turned[a]! - middle);
}

export function wrap(angle: number): number {
  return angle - 2 * Math.PI * Math.round(angle / (2 * Math.PI));
}
