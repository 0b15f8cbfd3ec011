/** Robust and circular statistics that skip what is not a number. */
import { medianAbsoluteDeviation, median as medianOf, sampleStandardDeviation } from "simple-statistics";

/** sigma of a normal distribution over its MAD: 1 / Phi^-1(3/4) */
export const MAD_TO_SIGMA = 1.482602218505602;
/** median over sigma of a Rayleigh distribution: sqrt(2 ln 2) */
export const RAYLEIGH_MEDIAN = 1.1774100225154747;

/** Median of the numbers among the values; the mean of the middle two of an even count; NaN of none. */
export function median(values: ArrayLike<number>): number {
  const numbers = numbersOf(values);
  return numbers.length === 0 ? Number.NaN : medianOf(numbers);
}

/** Median absolute deviation about the median, not scaled; NaN of none. */
export function mad(values: ArrayLike<number>): number {
  const numbers = numbersOf(values);
  return numbers.length === 0 ? Number.NaN : medianAbsoluteDeviation(numbers);
}

/** The standard deviation that a normal distribution of this MAD has. */
export function robustSigma(values: ArrayLike<number>): number {
  return MAD_TO_SIGMA * mad(values);
}

/** Standard deviation of a sample, with n - 1; NaN of fewer than two numbers. */
export function standardDeviation(values: ArrayLike<number>): number {
  const numbers = numbersOf(values);
  return numbers.length < 2 ? Number.NaN : sampleStandardDeviation(numbers);
}

/** Smallest and largest of the numbers among the values; NaN of none. */
export function range(values: ArrayLike<number>): [number, number] {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < values.length; i++) {
    const value = values[i]!;
    if (value < low) low = value;
    if (value > high) high = value;
  }
  return low <= high ? [low, high] : [Number.NaN, Number.NaN];
}

/**
 * Modified z of every value: 0.6745 (x - median)/MAD; with a MAD of 0, (x - median)/(1.253314 mean |x - median|);
 * with that 0 too, 0. NaN where the value is.
 * @see Iglewicz & Hoaglin 1993, How to Detect and Handle Outliers, ASQC, pp. 11-13
 */
export function modifiedZ(values: ArrayLike<number>): Float64Array {
  const centre = median(values);
  const scale = MAD_TO_SIGMA * mad(values) || meanDeviationSigma(values, centre);
  return Float64Array.from(values as ArrayLike<number>, (value) =>
    Number.isNaN(value) ? Number.NaN : scale > 0 ? (value - centre) / scale : 0,
  );
}

/** sigma over the mean absolute deviation of a normal distribution: sqrt(pi/2) */
const MEAN_DEVIATION_TO_SIGMA = 1.2533141373155001;

function meanDeviationSigma(values: ArrayLike<number>, centre: number): number {
  const deviations = numbersOf(values).map((value) => Math.abs(value - centre));
  const sum = deviations.reduce((total, deviation) => total + deviation, 0);
  return deviations.length === 0 ? Number.NaN : (MEAN_DEVIATION_TO_SIGMA * sum) / deviations.length;
}

export interface CircularMean {
  /** -pi..pi; of no meaning where the resultant is near 0 */
  readonly mean: number;
  /** 0..1 */
  readonly resultant: number;
  /** sqrt(-2 ln R), radians */
  readonly deviation: number;
}

/** Mean direction of angles in radians, NaN left out. @see Fisher 1993, Statistical Analysis of Circular Data */
export function circularMean(angles: ArrayLike<number>): CircularMean {
  let c = 0;
  let s = 0;
  let n = 0;
  for (let i = 0; i < angles.length; i++) {
    const angle = angles[i]!;
    if (Number.isNaN(angle)) continue;
    c += Math.cos(angle);
    s += Math.sin(angle);
    n += 1;
  }
  if (n === 0) return { mean: Number.NaN, resultant: Number.NaN, deviation: Number.NaN };
  const resultant = Math.min(1, Math.hypot(c, s) / n);
  return { mean: Math.atan2(s, c), resultant, deviation: Math.sqrt(Math.max(0, -2 * Math.log(resultant))) };
}

function numbersOf(values: ArrayLike<number>): number[] {
  const numbers: number[] = [];
  for (let i = 0; i < values.length; i++) if (!Number.isNaN(values[i])) numbers.push(values[i]!);
  return numbers;
}
