/**
 * Generalized spectral kurtosis: whether accumulated powers are those of noise. It asks for no level: 1 for noise of any
 * strength, below 1 for a steady carrier, above 1 for what comes and goes.
 * @see Nita & Gary 2010, MNRAS 406, L60
 */

/**
 * @param sum    S1, sum of `count` powers
 * @param square S2, sum of their squares
 * @param count  M
 * @param shape  N d: each power the sum of N with shape d; 1 for |V|^2 of one complex sample
 * @returns NaN for fewer than two powers or no power at all
 */
export function spectralKurtosis(sum: number, square: number, count: number, shape = 1): number {
  if (count < 2 || !(sum > 0)) return Number.NaN;
  return ((count * shape + 1) / (count - 1)) * ((count * square) / (sum * sum) - 1);
}

/** Variance of the estimate in noise. */
export function spectralKurtosisVariance(count: number, shape = 1): number {
  const m = count;
  const all = m * shape;
  return (2 * shape * (shape + 1) * m * m) / ((m - 1) * (all + 2) * (all + 3));
}

export interface KurtosisMoments {
  readonly variance: number;
  readonly skewness: number;
  /** fourth central moment over variance squared, 3 for a normal distribution */
  readonly kurtosis: number;
}

/** Central moments of the estimate in noise: powers over their sum are Dirichlet distributed. */
export function spectralKurtosisMoments(count: number, shape = 1): KurtosisMoments {
  const variance = spectralKurtosisVariance(count, shape);
  const scale = ((count * shape + 1) * count) / (count - 1);
  // About a centre near the mean, so that the fourth moment keeps its digits: E[sum w^2] = (shape + 1)/(M shape + 1).
  const raw = [1, 2, 3, 4].map((power) => dirichletMoment(power, count, shape));
  const mean = raw[0]!;
  const third = raw[2]! - 3 * mean * raw[1]! + 2 * mean ** 3;
  const fourth = raw[3]! - 4 * mean * raw[2]! + 6 * mean * mean * raw[1]! - 3 * mean ** 4;
  return {
    variance,
    skewness: (third * scale ** 3) / variance ** 1.5,
    kurtosis: (fourth * scale ** 4) / (variance * variance),
  };
}

/** Groups that the factors of (sum w^2)^power fall into, and in how many ways; each group of k gives w^(2k). */
const PARTITIONS: readonly (readonly [ways: number, groups: readonly number[]])[][] = [
  [[1, [1]]],
  [
    [1, [2]],
    [1, [1, 1]],
  ],
  [
    [1, [3]],
    [3, [2, 1]],
    [1, [1, 1, 1]],
  ],
  [
    [1, [4]],
    [4, [3, 1]],
    [3, [2, 2]],
    [6, [2, 1, 1]],
    [1, [1, 1, 1, 1]],
  ],
];

/** E[(sum of w_i^2)^power] for w Dirichlet with `count` equal parameters `shape`. */
function dirichletMoment(power: number, count: number, shape: number): number {
  const denominator = rising(count * shape, 2 * power);
  return PARTITIONS[power - 1]!.reduce((sum, [ways, groups]) => {
    const places = groups.reduce((product, _, i) => product * (count - i), 1);
    const powers = groups.reduce((product, k) => product * rising(shape, 2 * k), 1);
    return sum + (ways * places * powers) / denominator;
  }, 0);
}

/** x (x + 1) ... (x + n - 1) */
function rising(x: number, n: number): number {
  let product = 1;
  for (let k = 0; k < n; k++) product *= x + k;
  return product;
}

/**
 * Limits that noise crosses with probability `tail` on each side, by the Pearson distribution of the first four moments.
 *
 * @param count M, at least 16: below, the curve is no good approximation
 * @param shape N d up to about 100: above, the fourth moment loses its digits
 */
export function spectralKurtosisLimits(
  count: number,
  shape = 1,
  tail = 0.001349898032,
): { readonly lower: number; readonly upper: number } {
  const moments = spectralKurtosisMoments(count, shape);
  const sigma = Math.sqrt(moments.variance);
  const [lower, upper] = pearsonQuantiles(moments, tail);
  return { lower: 1 + sigma * lower, upper: 1 + sigma * upper };
}

/** Steps and half width, in sigmas, of the grid that the curve is integrated on. */
const GRID = 60000;
const REACH = 40;

/**
 * Quantiles `tail` and 1 - `tail` of the Pearson curve with mean 0, variance 1: f'/f = -(x + a)/(c0 + c1 x + c2 x^2),
 * integrated on a grid (Pearson 1916; Stuart & Ord 1994, Kendall's Advanced Theory of Statistics 1, section 6.2).
 */
function pearsonQuantiles({ skewness, kurtosis }: KurtosisMoments, tail: number): [number, number] {
  const b1 = skewness * skewness;
  const whole = 10 * kurtosis - 12 * b1 - 18;
  const c0 = (4 * kurtosis - 3 * b1) / whole;
  const c1 = (skewness * (kurtosis + 3)) / whole;
  const c2 = (2 * kurtosis - 3 * b1 - 6) / whole;
  const slope = (x: number) => -(x + c1) / (c0 + c1 * x + c2 * x * x);
  const step = (2 * REACH) / GRID;
  const density = new Float64Array(GRID + 1);
  // Outwards from the mode, where the curve is highest; it ends where its denominator has a root.
  const centre = Math.round((REACH - c1) / step);
  density[centre] = 1;
  for (const direction of [1, -1]) {
    let log = 0;
    for (let i = centre + direction; i >= 0 && i <= GRID; i += direction) {
      const x = -REACH + i * step;
      const middle = x - (direction * step) / 2;
      if (!(c0 + c1 * x + c2 * x * x > 0)) break;
      // Simpson's rule on the logarithm of the curve.
      const before = slope(x - direction * step);
      log += (direction * step * (before + 4 * slope(middle) + slope(x))) / 6;
      density[i] = Math.exp(log);
    }
  }
  const total = density.reduce((sum, value) => sum + value, 0);
  return [quantile(density, tail * total, step), -quantile(density.toReversed(), tail * total, step)];
}

/** Where the area from the left reaches `area`, in grid cells about each point, linear between. */
function quantile(density: Float64Array, area: number, step: number): number {
  let sum = 0;
  for (let i = 0; i < density.length; i++) {
    const next = sum + density[i]!;
    if (next >= area) return -REACH + (i - 0.5 + (area - sum) / density[i]!) * step;
    sum = next;
  }
  return REACH;
}
