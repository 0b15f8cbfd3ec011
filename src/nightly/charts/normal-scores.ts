/**
 * A series of nights as standard normal scores, whatever its distribution: each night's rank among those up to it. Of a
 * series without trend the ranks are independent of each other and of the distribution, so that what charts promise for
 * normal data holds for any.
 * @see Conover, Tercero-Gómez & Cordero-Franco 2017, Sequential Analysis 36, 397 (sequential normal scores)
 */
import { logUpperTail } from "../../detect/statistics/normal.ts";

/** (values) score of each among those up to it; the first is 0, equal values share their rank. */
export function sequentialNormalScores(values: ArrayLike<number>): Float64Array {
  const sorted: number[] = [];
  return Float64Array.from(values, (value) => {
    const below = lowerBound(sorted, value);
    const upTo = upperBound(sorted, value);
    sorted.splice(below, 0, value);
    const rank = (below + upTo + 2) / 2;
    return normalQuantile((rank - 0.5) / sorted.length);
  });
}

function lowerBound(sorted: readonly number[], value: number): number {
  return firstWhere(sorted, (other) => other >= value);
}

function upperBound(sorted: readonly number[], value: number): number {
  return firstWhere(sorted, (other) => other > value);
}

function firstWhere(sorted: readonly number[], holds: (value: number) => boolean): number {
  let [low, high] = [0, sorted.length];
  while (low < high) {
    const middle = (low + high) >> 1;
    if (holds(sorted[middle]!)) high = middle;
    else low = middle + 1;
  }
  return low;
}

/** The standard normal value that a share p of them lies below; 0 < p < 1. */
export function normalQuantile(p: number): number {
  if (p === 0.5) return 0;
  const tail = Math.log(p < 0.5 ? p : 1 - p);
  // Newton on the logarithm of the tail, which is nearly a parabola.
  let z = Math.sqrt(Math.max(0, -2 * (tail + Math.LN2)));
  for (let step = 0; step < 20; step++) {
    const log = logUpperTail(z);
    const slope = -Math.exp(-(z * z) / 2 - log) / Math.sqrt(2 * Math.PI);
    const change = (log - tail) / slope;
    z -= change;
    if (Math.abs(change) < 1e-13) break;
  }
  return p < 0.5 ? -z : z;
}
