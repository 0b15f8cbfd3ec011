/** Differences between channels of a row, from which noise is measured. All addresses are of `kernelMemory`. */
import { kernelsOr } from "../../util/kernels/compiled.ts";
import { kernelMemory } from "../../util/kernels/memory.ts";

export interface DifferenceKernels {
  /**
   * |V(c - reach) - 2 V(c) + V(c + after)| of a row, in float64, rounded to float32; with a reach of 0 that is the first
   * difference |V(c + after) - V(c)|.
   *
   * @param real address of (samples of a row) float32, 16 bytes behind it readable; likewise imag
   * @param bits address of (samples) int32, negative where a sample is not usable
   * @param out  address of (samples) int32, 12 bytes behind it writable: bits of the float32, or -1 where there is none
   */
  fillDifferences(
    real: number,
    imag: number,
    bits: number,
    subbands: number,
    channels: number,
    polarizations: number,
    reach: number,
    after: number,
    out: number,
  ): void;
}

export const plainDifferences: DifferenceKernels = {
  fillDifferences(real, imag, bits, subbands, channels, polarizations, reach, after, out) {
    const { f32, i32 } = kernelMemory.heap;
    const down = reach * polarizations;
    const up = after * polarizations;
    const [re, im, kinds, to] = [real / 4, imag / 4, bits / 4, out / 4];
    i32.fill(-1, to, to + subbands * channels * polarizations);
    for (let s = 0; s < subbands; s++) {
      const first = (s * channels + reach) * polarizations;
      const end = (s * channels + channels - after) * polarizations;
      for (let i = first; i < end; i++) {
        if ((i32[kinds + i - down]! | i32[kinds + i]! | i32[kinds + i + up]!) < 0) continue;
        const x = f32[re + i - down]! - 2 * f32[re + i]! + f32[re + i + up]!;
        const y = f32[im + i - down]! - 2 * f32[im + i]! + f32[im + i + up]!;
        f32[to + i] = Math.sqrt(x * x + y * y);
      }
    }
  },
};

export const differenceKernels: DifferenceKernels = kernelsOr(plainDifferences);
