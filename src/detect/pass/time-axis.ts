/**
 * Datasets of few channels: a sample against the cubic through its two neighbours on each side in time. Only what
 * stands alone can be seen so.
 */

import { scoreOfPower } from "../statistics/normal.ts";
import { medianInPlace } from "../statistics/order.ts";
import type { Plane } from "./plane.ts";

/** (-1, 4, [6], 4, -1)/6 interpolates a cubic; noise of the difference over that of a sample, squared. */
const OUTER = -1 / 6;
const INNER = 4 / 6;
const FEWEST = 12;

/**
 * Fill `power` with scores, 0 where a sample has no neighbours in its scan; leaves the model equal to the samples,
 * except at those that stand out, where it is the interpolation.
 */
export function fillScoresInTime(plane: Plane, scanOf: (row: number) => number): void {
  const { rows, columns, real, imag, marks, power, modelReal, modelImag } = plane;
  const work = new Float64Array(rows);
  for (let c = 0; c < columns; c++) {
    let count = 0;
    for (let row = 0; row < rows; row++) {
      const i = row * columns + c;
      power[i] = 0;
      modelReal[i] = real[i]!;
      modelImag[i] = imag[i]!;
      const [a, b, d, e] = [i - 2 * columns, i - columns, i + columns, i + 2 * columns];
      if (row < 2 || row + 2 >= rows || scanOf(row - 2) !== scanOf(row + 2)) continue;
      if (marks[i]! + marks[a]! + marks[b]! + marks[d]! + marks[e]! !== 0) continue;
      const re = OUTER * (real[a]! + real[e]!) + INNER * (real[b]! + real[d]!);
      const im = OUTER * (imag[a]! + imag[e]!) + INNER * (imag[b]! + imag[d]!);
      const p = (real[i]! - re) ** 2 + (imag[i]! - im) ** 2;
      power[i] = p;
      work[count++] = p;
    }
    const noise = count < FEWEST ? Number.NaN : medianInPlace(work, count) / Math.LN2;
    for (let row = 0; row < rows; row++) {
      const i = row * columns + c;
      // An outlier spoils the interpolation of its neighbours too: the largest of them is the one.
      const p = power[i]!;
      const peak =
        (row < 1 || p >= power[i - columns]!) && (row + 1 >= rows || p > power[i + columns]!) && p > 0;
      work[row] = peak && noise > 0 ? Math.min(8, scoreOfPower(p / noise)) : 0;
    }
    for (let row = 0; row < rows; row++) power[row * columns + c] = work[row]!;
  }
}

/** Index of the integration that a time belongs to: the last that does not begin after it. */
export function indexOfTime(times: Float64Array, time: number, near = 0): number {
  // Rows come in order of time: the next integration is the usual answer.
  for (let i = near; i < Math.min(near + 2, times.length); i++) {
    if (times[i]! <= time && (i + 1 === times.length || times[i + 1]! > time)) return i;
  }
  let low = 0;
  let high = times.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (times[middle]! <= time) low = middle + 1;
    else high = middle;
  }
  return Math.max(0, low - 1);
}
