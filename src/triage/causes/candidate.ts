/** Sets of samples that may be at fault, and what the data say of each. */
import type { Visibilities } from "../sky/model.ts";
import type { Understanding } from "../sky/understand.ts";
import { bestInterval, type Interval } from "./interval.ts";

export interface Candidate {
  readonly kind: "baseline" | "antenna" | "channel";
  /** index in Survey.baselines, antenna number, or channel bin */
  readonly which: number;
  readonly interval: Interval;
  /** of an antenna: what its gain is off by, a factor minus 1; 0 for the others */
  readonly gainRe: number;
  readonly gainIm: number;
  /** of an antenna: share of what its samples are off by that this factor accounts for */
  readonly structured: number;
}

/** Below this the data show nothing: the best of some 10^5 stretches reaches 15 by chance. */
const LEAST_GAIN = 30;

/**
 * The likeliest baseline, antenna and channel, each with its stretch of time.
 *
 * @param rest data less sources
 * @param free (atoms) 1 where a sample is not laid at some cause already
 */
export function findCandidates(seen: Understanding, rest: Visibilities, free: Uint8Array): Candidate[] {
  if (!(seen.atoms.noise > 0)) return [];
  return KINDS.flatMap((kind) => {
    const candidate = FINDERS[kind](seen, rest, free, null);
    return candidate !== null && candidate.interval.gain > LEAST_GAIN ? [candidate] : [];
  });
}

/** A candidate looked at again with better known sources; itself where nothing stands out any more. */
export function lookedAtAgain(
  seen: Understanding,
  rest: Visibilities,
  free: Uint8Array,
  candidate: Candidate,
): Candidate {
  const again = FINDERS[candidate.kind](seen, rest, free, candidate.which);
  return again !== null && again.interval.gain > LEAST_GAIN ? again : candidate;
}

const KINDS = ["baseline", "antenna", "channel"] as const;

/** @param only the one to look at, by `Candidate.which`; null: all */
type Finder = (
  seen: Understanding,
  rest: Visibilities,
  free: Uint8Array,
  only: number | null,
) => Candidate | null;

const FINDERS: Readonly<Record<Candidate["kind"], Finder>> = {
  baseline: bestBaseline,
  antenna: bestAntenna,
  channel: bestChannel,
};

function bestBaseline(...[seen, rest, free, only]: Parameters<Finder>): Candidate | null {
  const { atoms } = seen;
  const { times } = atoms.bins;
  const count = seen.sampling.survey.baselines.length;
  const [re, im, weight] = [count * times, count * times, count * times].map((n) => new Float64Array(n));
  for (let k = 0; k < atoms.count; k++) {
    if (free[k] === 0) continue;
    const at = atoms.baseline[k]! * times + atoms.time[k]!;
    re![at]! += atoms.weight[k]! * rest.re[k]!;
    im![at]! += atoms.weight[k]! * rest.im[k]!;
    weight![at]! += atoms.weight[k]!;
  }
  const powers = re!.map((x, i) => (x * x + im![i]! ** 2) / (2 * atoms.noise * weight![i]!));
  let best: Candidate | null = null;
  for (let row = 0; row < count; row++) {
    if (only !== null && row !== only) continue;
    const interval = bestInterval(powers.subarray(row * times, (row + 1) * times));
    if (interval === null || (best !== null && interval.gain <= best.interval.gain)) continue;
    best = { kind: "baseline", which: row, interval, gainRe: 0, gainIm: 0, structured: 0 };
  }
  return best;
}

/** An antenna's gain error turns and scales the sources on all of its baselines alike. */
function bestAntenna(...[seen, rest, free, only]: Parameters<Finder>): Candidate | null {
  const { atoms, sampling } = seen;
  const { times } = atoms.bins;
  const { baselines, antennasWithData: antennas } = sampling.survey;
  const place = new Map(antennas.map((antenna, i) => [antenna, i]));
  const size = antennas.length * times;
  const sums = { re: new Float64Array(size), im: new Float64Array(size), model: new Float64Array(size) };
  const off = new Float64Array(size);
  const seenSamples = new Float64Array(size);
  for (let k = 0; k < atoms.count; k++) {
    if (free[k] === 0) continue;
    const { antenna1, antenna2 } = baselines[atoms.baseline[k]!]!;
    const mRe = atoms.re[k]! - rest.re[k]!;
    const mIm = atoms.im[k]! - rest.im[k]!;
    const weight = atoms.weight[k]!;
    const re = weight * (mRe * rest.re[k]! + mIm * rest.im[k]!);
    const im = weight * (mRe * rest.im[k]! - mIm * rest.re[k]!);
    for (const [antenna, sign] of [
      [antenna1, 1],
      [antenna2, -1],
    ] as const) {
      const at = place.get(antenna)! * times + atoms.time[k]!;
      sums.re[at]! += re;
      // The second antenna's gain enters as its conjugate.
      sums.im[at]! += sign * im;
      sums.model[at]! += weight * (mRe * mRe + mIm * mIm);
      off[at]! += weight * (rest.re[k]! ** 2 + rest.im[k]! ** 2);
      seenSamples[at]! += 1;
    }
  }
  const powers = sums.re.map((x, i) => (x * x + sums.im[i]! ** 2) / (2 * atoms.noise * sums.model[i]!));
  let best: Candidate | null = null;
  antennas.forEach((antenna, row) => {
    if (only !== null && antenna !== only) return;
    const interval = bestInterval(powers.subarray(row * times, (row + 1) * times));
    if (interval === null || (best !== null && interval.gain <= best.interval.gain)) return;
    let [re, im, model, all] = [0, 0, 0, 0];
    for (let t = interval.first; t <= interval.last; t++) {
      const at = row * times + t;
      re += sums.re[at]!;
      im += sums.im[at]!;
      model += sums.model[at]!;
      all += off[at]! - 2 * atoms.noise * seenSamples[at]!;
    }
    best = {
      kind: "antenna",
      which: antenna,
      interval,
      gainRe: re / model,
      gainIm: im / model,
      structured: (re * re + im * im) / model / Math.max(all, 1e-300),
    };
  });
  return best;
}

/** Interference keeps no phase: its power counts, not its mean. */
function bestChannel(...[seen, rest, free, only]: Parameters<Finder>): Candidate | null {
  const { atoms } = seen;
  const { times, channels } = atoms.bins;
  const power = new Float64Array(channels * times);
  const count = new Float64Array(channels * times);
  for (let k = 0; k < atoms.count; k++) {
    if (free[k] === 0) continue;
    const at = atoms.channel[k]! * times + atoms.time[k]!;
    power[at]! += (atoms.weight[k]! * (rest.re[k]! ** 2 + rest.im[k]! ** 2)) / (2 * atoms.noise);
    count[at]! += 1;
  }
  let best: Candidate | null = null;
  for (let channel = 0; channel < channels; channel++) {
    if (only !== null && channel !== only) continue;
    // The mean of n powers has 1/sqrt(n) of their scatter: brought back to that of one.
    const scaled = new Float64Array(times);
    for (let t = 0; t < times; t++) {
      const at = channel * times + t;
      const n = count[at]!;
      scaled[t] = n === 0 ? Number.NaN : Math.max(0, 1 + (power[at]! / n - 1) * Math.sqrt(n));
    }
    const interval = bestInterval(scaled);
    if (interval === null || (best !== null && interval.gain <= best.interval.gain)) continue;
    best = { kind: "channel", which: channel, interval, gainRe: 0, gainIm: 0, structured: 0 };
  }
  return best;
}

/** Whether a candidate holds a sample. */
export function holds(seen: Understanding, candidate: Candidate): (k: number) => boolean {
  const { first, last } = candidate.interval;
  const touches = touchesOf(seen, candidate);
  return (k) => seen.atoms.time[k]! >= first && seen.atoms.time[k]! <= last && touches(k);
}

/** Whether a sample is of the candidate's baseline, antenna or channel at any time. */
export function touchesOf(seen: Understanding, { kind, which }: Candidate): (k: number) => boolean {
  const { atoms, sampling } = seen;
  if (kind === "baseline") return (k) => atoms.baseline[k] === which;
  if (kind === "channel") return (k) => atoms.channel[k] === which;
  const touches = Uint8Array.from(sampling.survey.baselines, ({ antenna1, antenna2 }) =>
    antenna1 === which || antenna2 === which ? 1 : 0,
  );
  return (k) => touches[atoms.baseline[k]!] === 1;
}
