/**
 * The stretch of time in which something stands out. Powers are in units of their noise: exponentially distributed with
 * a mean of 1 where nothing is wrong, with a larger mean within the stretch.
 */

export interface Interval {
  /** first and last bin */
  readonly first: number;
  readonly last: number;
  /** natural logarithm of the likelihood ratio of the two means */
  readonly gain: number;
  /** mean power within, of the bins that have one */
  readonly mean: number;
}

/** Means that are tried first; each is then replaced by the one found. */
const MEANS = [2, 4, 12, 60, 400, 4000];
const ROUNDS = 3;

/** @param powers (bins) NaN where there are no data. @returns null where no bin has data or none is above 1 */
export function bestInterval(powers: Float64Array): Interval | null {
  let best: Interval | null = null;
  for (const start of MEANS) {
    let mean = start;
    for (let round = 0; round < ROUNDS; round++) {
      const found = likeliest(powers, mean);
      if (found === null) break;
      if (best === null || found.gain > best.gain) best = found;
      if (!(found.mean > 1.05)) break;
      mean = found.mean;
    }
  }
  return best;
}

/** The stretch with the largest sum of log likelihood ratios (Kadane's algorithm). */
function likeliest(powers: Float64Array, mean: number): Interval | null {
  const slope = 1 - 1 / mean;
  const cost = Math.log(mean);
  let [sum, from] = [0, 0];
  let [best, first, last] = [0, -1, -1];
  for (let i = 0; i < powers.length; i++) {
    const power = powers[i]!;
    if (Number.isNaN(power)) continue;
    if (sum <= 0) {
      sum = 0;
      from = i;
    }
    sum += power * slope - cost;
    if (sum > best) {
      best = sum;
      first = from;
      last = i;
    }
  }
  if (first < 0) return null;
  let [total, count] = [0, 0];
  for (let i = first; i <= last; i++) {
    if (Number.isNaN(powers[i]!)) continue;
    total += powers[i]!;
    count += 1;
  }
  const found = total / count;
  return { first, last, mean: found, gain: count * (found - 1 - Math.log(found)) };
}
