/**
 * What the screen reads of rows: second differences along the channels, V(c-1) - 2 V(c) + V(c+1), which a smooth
 * background hardly enters; their powers, in steps of 1/32 octave, over the row's own mean of that. Everything after the
 * power is whole numbers, so that sums over rows are the same in any order.
 */
import { kernelsOr } from "../../util/kernels/compiled.ts";
import { kernelMemory } from "../../util/kernels/memory.ts";

/** Steps an octave of power: five bits of a float32's mantissa. */
export const STEPS_PER_OCTAVE = 32;
const SHIFT = 23 - 5;
/** Beyond this a float32 is not finite. */
const NOT_FINITE = 255 << 5;
/** A power at its row's level, and the highest: what is brighter says no more. */
export const AT_LEVEL = 96;
export const HIGHEST = 255;
/** Above this a difference is high: 4 times the mean power of noise, whose log mean is 0.5615 (e^-gamma) of it. */
export const HIGH = 187;
/** Above this it is bright: 15 times, which one in three million of noise is. */
export const BRIGHT = 247;

/** Numbers of each row and product that `screenRows` leaves: level, differences, how many of them are bright, and high. */
export const OUTPUTS = 4;
export const LEVEL = 0;
export const COUNT = 1;
export const COUNT_BRIGHT = 2;
export const COUNT_HIGH = 3;

/** Bytes that the arrays of samples need behind their ends: vectors reach over them. */
export const PADDING = 16;

export interface RowScreenKernels {
  /**
   * Rows that lie one after the other. Addresses of arrays of samples are those of (rows x samples of a row).
   *
   * @param polarizations 1, 2 or 4
   * @param together      all sub-bands have one level
   * @param real          address of float32; likewise imag
   * @param bits          address of int32, negative where a sample is not usable
   * @param scratch       address of (samples of a row) int32
   * @param sums          address of (samples of a row) uint32, added to: how far each was above 3 octaves below its level
   * @param counts        address of (samples of a row) uint32, added to: differences, of rows that are not whole
   * @param out           address of (rows x OUTPUTS x products) int32
   * @returns rows of which every difference counts
   */
  screenRows(
    rows: number,
    subbands: number,
    channels: number,
    polarizations: number,
    together: boolean,
    real: number,
    imag: number,
    bits: number,
    scratch: number,
    sums: number,
    counts: number,
    out: number,
  ): number;
}

export const plainRowScreen: RowScreenKernels = {
  screenRows(
    rows,
    subbands,
    channels,
    polarizations,
    together,
    real,
    imag,
    bits,
    scratch,
    sums,
    counts,
    out,
  ) {
    const rowSamples = subbands * channels * polarizations;
    const products = subbands * polarizations;
    const { i32 } = kernelMemory.heap;
    let whole = 0;
    for (let row = 0; row < rows; row++) {
      const from = row * rowSamples;
      const to = out / 4 + row * OUTPUTS * products;
      let missing = 0;
      for (let product = 0; product < products; product++) {
        const first = firstOf(product, channels, polarizations);
        const places = [real / 4 + from + first, imag / 4 + from + first, bits / 4 + from + first] as const;
        missing += fillSteps(...places, scratch / 4 + first, channels, polarizations, to + product, products);
      }
      settleLevels(i32, to, subbands, polarizations, together);
      if (missing === 0) whole += 1;
      const tally = missing === 0 ? -1 : counts / 4;
      for (let product = 0; product < products; product++) {
        const first = firstOf(product, channels, polarizations);
        const known = tally < 0 ? -1 : tally + first;
        addSteps(
          scratch / 4 + first,
          sums / 4 + first,
          known,
          channels,
          polarizations,
          to + product,
          products,
        );
      }
    }
    return whole;
  },
};

function firstOf(product: number, channels: number, polarizations: number): number {
  return Math.floor(product / polarizations) * channels * polarizations + (product % polarizations);
}

/** All places are indices of 4-byte numbers, of the first channel. @returns how many are missing */
function fillSteps(
  real: number,
  imag: number,
  bits: number,
  scratch: number,
  channels: number,
  stride: number,
  out: number,
  products: number,
): number {
  const { i32, f32 } = kernelMemory.heap;
  let sum = 0;
  let count = 0;
  for (let c = 1, o = stride; c < channels - 1; c++, o += stride) {
    const re = Math.fround(
      Math.fround(f32[real + o - stride]! + f32[real + o + stride]!) - 2 * f32[real + o]!,
    );
    const im = Math.fround(
      Math.fround(f32[imag + o - stride]! + f32[imag + o + stride]!) - 2 * f32[imag + o]!,
    );
    f32[scratch + o] = Math.fround(re * re) + Math.fround(im * im);
    const step = i32[scratch + o]! >> SHIFT;
    const usable = (i32[bits + o - stride]! | i32[bits + o]! | i32[bits + o + stride]!) >= 0;
    // No power at all has no logarithm: channels that are equal, or so faint, tell nothing.
    const good = usable && step > 0 && step < NOT_FINITE;
    i32[scratch + o] = good ? step : -1;
    if (!good) continue;
    sum += step;
    count += 1;
  }
  i32[out + LEVEL * products] = sum;
  i32[out + COUNT * products] = count;
  return channels - 2 - count;
}

/** Sums of steps into means: of each sub-band, or of all of them together. */
function settleLevels(
  i32: Int32Array,
  out: number,
  subbands: number,
  polarizations: number,
  together: boolean,
): void {
  const products = subbands * polarizations;
  for (let p = 0; p < polarizations; p++) {
    let sum = 0;
    let count = 0;
    for (let product = p; product < products; product += polarizations) {
      sum += i32[out + LEVEL * products + product]!;
      count += i32[out + COUNT * products + product]!;
      if (together) continue;
      i32[out + LEVEL * products + product] = count === 0 ? 0 : Math.floor(sum / count);
      sum = 0;
      count = 0;
    }
    if (!together) continue;
    const mean = count === 0 ? 0 : Math.floor(sum / count);
    for (let product = p; product < products; product += polarizations) {
      i32[out + LEVEL * products + product] = mean;
    }
  }
}

/** @param counts -1: the row is whole */
function addSteps(
  scratch: number,
  sums: number,
  counts: number,
  channels: number,
  stride: number,
  out: number,
  products: number,
): void {
  const { i32, u32 } = kernelMemory.heap;
  const shift = AT_LEVEL - i32[out + LEVEL * products]!;
  let bright = 0;
  let high = 0;
  for (let c = 1, o = stride; c < channels - 1; c++, o += stride) {
    const step = i32[scratch + o]!;
    if (step < 0) continue;
    const x = Math.max(0, Math.min(HIGHEST, step + shift));
    u32[sums + o]! += x;
    if (counts >= 0) u32[counts + o]! += 1;
    if (x > BRIGHT) bright += 1;
    if (x > HIGH) high += 1;
  }
  i32[out + COUNT_BRIGHT * products] = bright;
  i32[out + COUNT_HIGH * products] = high;
}

export const rowScreen: RowScreenKernels = kernelsOr(plainRowScreen);
