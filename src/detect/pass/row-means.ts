/**
 * Means of a row over its channels without what stands out: samples that do are replaced by the background, so that
 * interference does not turn an antenna's phase.
 */
import type { Shape } from "../../dataset/dataset.ts";
import type { Band } from "./bands.ts";
import type { Plane } from "./plane.ts";
import type { RowMeans } from "./tile-result.ts";

/** What means are taken of. */
export interface MeansOf {
  readonly shape: Shape;
  /** whether channels that are flagged in some integrations only are replaced as well */
  readonly fill: boolean;
  /** (channels of all sub-bands) 1 to do without; null: none */
  readonly leftOut: Uint8Array | null;
}

/**
 * One row of a plane.
 *
 * @param place of the row in `means`
 * @param noise 2 sigma^2 of a sample, NaN unknown
 */
export function addRowMeans(
  means: RowMeans,
  of: MeansOf,
  place: number,
  band: Band,
  polarization: number,
  plane: Plane,
  row: number,
  noise: number,
): void {
  const { channels, subbands, polarizations } = of.shape;
  for (let c = 0; c < plane.columns; c += channels) {
    const subband = Math.floor((band.first + c) / channels);
    const at = (place * subbands + subband) * polarizations + polarization;
    addMean(means, of, at, subband * channels, plane, row * plane.columns + c, noise);
  }
}

function addMean(
  means: RowMeans,
  { shape: { channels }, fill, leftOut }: MeansOf,
  at: number,
  firstColumn: number,
  { real, imag, modelReal, modelImag, marks }: Plane,
  from: number,
  noise: number,
): void {
  let count = 0;
  let taken = 0;
  let pairs = 0;
  let re = 0;
  let im = 0;
  let slopeRe = 0;
  let slopeIm = 0;
  let beforeRe = 0;
  let beforeIm = 0;
  let before = false;
  for (let c = 0, i = from; c < channels; c++, i++) {
    const mark = marks[i]!;
    if ((mark === 2 && !fill) || (leftOut !== null && leftOut[firstColumn + c] === 1)) {
      before = false;
      continue;
    }
    const good = mark === 0;
    if (good) count += 1;
    const x = good ? real[i]! : modelReal[i]!;
    const y = good ? imag[i]! : modelImag[i]!;
    re += x;
    im += y;
    taken += 1;
    if (before) {
      slopeRe += x * beforeRe + y * beforeIm;
      slopeIm += y * beforeRe - x * beforeIm;
      pairs += 1;
    }
    beforeRe = x;
    beforeIm = y;
    before = true;
  }
  if (count === 0) return;
  means.real[at] = re / taken;
  means.imag[at] = im / taken;
  means.slopeReal[at] = pairs > 0 ? slopeRe / pairs : 0;
  means.slopeImag[at] = pairs > 0 ? slopeIm / pairs : 0;
  means.count[at] = count;
  means.noise[at] = noise;
}
