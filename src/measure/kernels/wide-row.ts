/** Rows with a usable sample of a size that float32 products do not hold: all in float64, one channel after the other. */
import { kernelMemory } from "../../util/kernels/memory.ts";
import * as LAYOUT from "./layout.ts";
import { BAD, FLAGGED, KINDS, SUMS, USABLE, WEIGHTLESS, ZERO } from "./layout.ts";

/** Addresses of one product of one row: of its first channel, its sums and its counts. */
export interface ProductPlace {
  readonly real: number;
  readonly imag: number;
  readonly weight: number;
  readonly bits: number;
  readonly sums: number;
  readonly counts: number;
}

/**
 * Bits, sums and counts of a product as `prepareRows` leaves them.
 *
 * @param stride from one channel to the next, samples
 */
export function takeWideProduct(at: ProductPlace, channels: number, stride: number, sign: number): void {
  const { f32, i32, f64 } = kernelMemory.heap;
  const [real, imag, weight, bits] = [at.real / 4, at.imag / 4, at.weight / 4, at.bits / 4];
  const sums = f64.subarray(at.sums / 8, at.sums / 8 + SUMS).fill(0);
  const counts = i32.subarray(at.counts / 4, at.counts / 4 + KINDS).fill(0);
  // Zero before the first channel and after an unusable one: such a pair adds nothing to the slope.
  let beforeReal = 0;
  let beforeImag = 0;
  for (let i = 0; i < channels * stride; i += stride) {
    const w = f32[weight + i]!;
    const re = f32[real + i]!;
    const im = f32[imag + i]!;
    const kind = kindOf(re, im, w);
    counts[kind]! += 1;
    if (kind === USABLE) {
      // Squares of float32s neither overflow nor vanish in a double.
      const amplitude = Math.sqrt(re * re + im * im);
      f32[bits + i] = amplitude;
      sums[LAYOUT.SUM_REAL]! += w * re;
      sums[LAYOUT.SUM_IMAG]! += sign * w * im;
      sums[LAYOUT.SUM_AMPLITUDE]! += amplitude;
      sums[LAYOUT.SUM_WEIGHT]! += w;
      sums[LAYOUT.SUM_SQUARE]! += w * w;
      sums[LAYOUT.SLOPE_REAL]! += re * beforeReal + im * beforeImag;
      sums[LAYOUT.SLOPE_IMAG]! += sign * (im * beforeReal - re * beforeImag);
      beforeReal = re;
      beforeImag = im;
      continue;
    }
    i32[bits + i] = -kind;
    if (kind === FLAGGED) sums[LAYOUT.FLAGGED_WEIGHT]! -= w;
    if (w === 0) counts[WEIGHTLESS]! += 1;
    beforeReal = 0;
    beforeImag = 0;
  }
}

function kindOf(re: number, im: number, w: number): number {
  if (w <= 0) return w > Number.NEGATIVE_INFINITY ? FLAGGED : BAD;
  if (!(w < Number.POSITIVE_INFINITY)) return BAD;
  if (re === 0 && im === 0) return ZERO;
  return Number.isFinite(re) && Number.isFinite(im) ? USABLE : BAD;
}
