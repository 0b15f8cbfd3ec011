/** From medians of differences between channels to noise: of white and of smoothed channels, channel by channel. */
import { median, RAYLEIGH_MEDIAN } from "../util/statistics.ts";
import type { NoiseSketches } from "./noise-sketches.ts";

/** Variance over that of one sample, white noise: of a first difference, and of a second one (1 + 4 + 1). */
const FIRST = 2;
const SECOND = 6;
/**
 * Channels smoothed by (1/4, 1/2, 1/4) correlate by 2/3 and 1/6 at lags 1 and 2: the variance of a second difference is
 * 6 - 8 (2/3) + 2 (1/6) = 1 instead of 6, of a first one over 1, 2, 3 channels 2/3, 5/3, 2 instead of 2.
 */
const SMOOTHED_SECOND = 1;
/** Differences below which smoothing is not judged. */
const ENOUGH_TO_JUDGE = 400;
/** Channels on either side that the running median of the noise looks at. */
const AROUND = 4;
/** Above this, of the running median, a channel holds something else than noise. */
const ODD_CHANNEL = 1.3;
/** Least share of its measured variance that the sharing-out of variances leaves a channel. */
const LEAST_SHARE = 0.05;

/** Noise along the channels of one sub-band and polarization. */
export interface ChannelNoise {
  /** (channels) noise of a channel over that of a sample of any channel, as measured; NaN where unknown */
  readonly own: Float64Array;
  /** (channels) the same with channels that stand out brought down to those around them, none unknown */
  readonly trend: Float64Array;
  /** share of the differences that are about channels that stand out */
  readonly odd: number;
}

export class NoiseReader {
  private readonly sketches: NoiseSketches;
  /** (subbands) noise over the median difference */
  private readonly factor: Float64Array;
  readonly smoothed: readonly boolean[];

  constructor(sketches: NoiseSketches) {
    this.sketches = sketches;
    const { subbands, channels } = sketches.shape;
    this.smoothed = Array.from({ length: subbands }, (_, s) => isSmoothed(sketches, s));
    this.factor = Float64Array.from(this.smoothed, (smoothed) => {
      const variance = channels === 2 ? FIRST : smoothed ? SMOOTHED_SECOND : SECOND;
      return 1 / (RAYLEIGH_MEDIAN * Math.sqrt(variance));
    });
  }

  /**
   * A reader of the typical noise of a sample of a baseline's sub-band and polarization: rms of its real or imaginary
   * part, NaN where there are fewer than `fewest` differences.
   *
   * @param odd  share of the differences to take for something else than noise, and for larger than noise
   */
  ofBaselines(
    subband: number,
    polarization: number,
    odd: number,
    fewest: number,
  ): (baseline: number) => number {
    const quantile = this.sketches.reader(subband, polarization, 0.5 * (1 - odd), fewest);
    return (baseline) => this.factor[subband]! * quantile(baseline);
  }

  ofChannels(subband: number, polarization: number): ChannelNoise {
    const { channels, polarizations } = this.sketches.shape;
    const measured = new Float64Array(channels).fill(Number.NaN);
    const count = new Float64Array(channels);
    if (channels > 2) {
      for (let c = 0; c < channels; c++) {
        const found = this.sketches.ofChannel((subband * channels + c) * polarizations + polarization);
        measured[c] = found.median;
        count[c] = found.count;
      }
    }
    const running = runningMedian(measured, AROUND);
    const isOdd = measured.map((value, c) => (value > ODD_CHANNEL * running[c]! ? 1 : 0));
    const typical = mixedMedian(
      measured,
      count.map((n, c) => (isOdd[c] === 1 ? 0 : n)),
    );
    const own = this.smoothed[subband] ? Float64Array.from(measured) : shareOut(measured);
    const trend = runningMedian(own, AROUND);
    for (let c = 0; c < channels; c++) {
      own[c]! /= typical;
      trend[c] = trend[c]! > 0 ? trend[c]! / typical : Number.NaN;
    }
    fillUnknown(trend);
    return { own, trend, odd: shareOf(count, isOdd) };
  }
}

/**
 * Whether neighbouring channels were smoothed, told from the growth of differences with their span. A slope of the
 * signal makes them grow too, but for ever, where smoothed noise is white again three channels on.
 */
function isSmoothed(sketches: NoiseSketches, subband: number): boolean {
  const { count, medians } = sketches.ofSpans(subband);
  if (!(count >= ENOUGH_TO_JUDGE)) return false;
  const [second, , two, three] = medians.map((value) => value * value) as [number, number, number, number];
  const growth = two / FIRST / (second / SECOND);
  const further = three / two;
  // White 1 and 1; smoothed 5 and 1.2; a slope as strong as makes the first 5 makes the second 2.
  return growth > 3.5 && growth < 6.5 && further < 1.5;
}

/** Running median over up to `around` known neighbours on either side, symmetric, so that an edge keeps its slope. */
export function runningMedian(values: Float64Array, around: number): Float64Array {
  return values.map((_, c) => {
    const reach = Math.max(1, Math.min(around, c, values.length - 1 - c));
    return median(values.subarray(Math.max(0, c - reach), c + reach + 1));
  });
}

/**
 * Noise of each channel from second differences, whose variance is (s(c-1) + 4 s(c) + s(c+1)) / 6 of the channels'
 * variances s: each run of neighbouring known ones solved for s, its ends taken for equal to what lies beyond.
 */
function shareOut(measured: Float64Array): Float64Array {
  const own = new Float64Array(measured.length).fill(Number.NaN);
  for (let from = 0; from < measured.length; ) {
    let to = from;
    while (to < measured.length && !Number.isNaN(measured[to]!)) to++;
    if (to > from) {
      const variances = solveRun(measured.subarray(from, to).map((value) => value * value));
      for (const [i, variance] of variances.entries()) own[from + i] = Math.sqrt(variance);
      // The channels at either end of a run have differences on one side only.
      if (from > 0) own[from - 1] = own[from]!;
      if (to < measured.length) own[to] = own[to - 1]!;
    }
    from = to + 1;
  }
  return own;
}

/** Thomas algorithm for (1 4 1)/6 with (5 1)/6 at both ends. */
function solveRun(right: Float64Array): Float64Array {
  const n = right.length;
  const upper = new Float64Array(n);
  const out = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const diagonal = 4 + (i === 0 ? 1 : 0) + (i === n - 1 ? 1 : 0);
    const pivot = diagonal - (i === 0 ? 0 : upper[i - 1]!);
    upper[i] = 1 / pivot;
    out[i] = (6 * right[i]! - (i === 0 ? 0 : out[i - 1]!)) / pivot;
  }
  for (let i = n - 2; i >= 0; i--) out[i]! -= upper[i]! * out[i + 1]!;
  return out.map((value, i) => Math.max(value, LEAST_SHARE * right[i]!));
}

/** Unknown values from the nearest known one, 1 where none is. */
function fillUnknown(values: Float64Array): void {
  const known = Float64Array.from(values);
  for (let c = 0; c < values.length; c++) {
    for (let away = 0; Number.isNaN(values[c]!) && away < values.length; away++) {
      const near = known[c - away] ?? Number.NaN;
      values[c] = Number.isNaN(near) ? (known[c + away] ?? Number.NaN) : near;
    }
    if (Number.isNaN(values[c]!)) values[c] = 1;
  }
}

/**
 * Median of Rayleigh numbers drawn from several distributions together, which is what a baseline's sketch holds.
 *
 * @param medians  of each distribution; NaN takes no part
 * @param count    numbers from each
 */
export function mixedMedian(medians: Float64Array, count: Float64Array): number {
  let [low, high, total] = [Number.POSITIVE_INFINITY, 0, 0];
  for (let c = 0; c < medians.length; c++) {
    if (!(medians[c]! >= 0 && count[c]! > 0)) continue;
    low = Math.min(low, medians[c]!);
    high = Math.max(high, medians[c]!);
    total += count[c]!;
  }
  if (total === 0) return Number.NaN;
  // The share below x is 1 - 2^-(x/median)^2 in each, and rises with x: halve the range where it passes one half.
  for (let round = 0; round < 60 && high > low; round++) {
    const middle = (low + high) / 2;
    let below = 0;
    for (let c = 0; c < medians.length; c++) {
      if (medians[c]! >= 0 && count[c]! > 0) below += count[c]! * (1 - 2 ** -((middle / medians[c]!) ** 2));
    }
    if (2 * below < total) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

function shareOf(count: Float64Array, picked: Float64Array): number {
  let sum = 0;
  let part = 0;
  for (let c = 0; c < count.length; c++) {
    sum += count[c]!;
    if (picked[c] === 1) part += count[c]!;
  }
  return sum === 0 ? 0 : part / sum;
}
