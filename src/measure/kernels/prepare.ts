/**
 * Rows as the accumulators take them: of each sample what it is and its amplitude, of each product its sums over
 * channels. See also `kernels.ts` for what other stages may use.
 *
 * The order of summation is part of the definition, so that the compiled kernel, its plain twin and every machine come
 * to the same bits. Channels of a product are dealt to L lanes, channel mod L, with L = 4 / polarizations (1 where that
 * is no whole number). A lane adds up GROUP channels at a time in float32, which loses at most GROUP/2 units in the last
 * place, and these sums in float64; at the end lanes are added as (0 + 1) + (2 + 3).
 *
 * Float32 holds the squares and products of weights and amplitudes between the limits below. A row with a usable sample
 * beyond them is left to the caller, who takes it in float64: `takeWideRow`.
 */
import { compiledKernels } from "../../util/kernels/compiled.ts";
import { kernelMemory } from "../../util/kernels/memory.ts";
import * as LAYOUT from "./layout.ts";
import { AUTOCORRELATION, BAD, FLAGGED, KINDS, SUMS, USABLE, WEIGHTLESS, ZERO } from "./layout.ts";

/** Channels of a lane that are added in float32. */
const GROUP = 16;
/** A float32's squares and their sums of 16 stay far from where float32 ends. */
const [LEAST_WEIGHT, MOST_WEIGHT] = [2 ** -40, 2 ** 40];
const [LEAST_POWER, MOST_POWER] = [2 ** -80, 2 ** 80];

export interface PrepareKernels {
  /**
   * @param from     row to begin with
   * @param rows     of the block
   * @param real     address of (rows x subbands x channels x polarizations) float32, 16 bytes before and after it
   *                 readable; likewise imag and weight
   * @param baseline address of (rows) int32: rows that are AUTOCORRELATION are passed over
   * @param sign     address of (rows) int8, 1 or -1: factor of the imaginary sums
   * @param bits     address of (rows x samples of a row) int32, out, 16 bytes after it writable: the bits of the float32
   *                 amplitude of a usable sample, of others minus what they are
   * @param sums     address of (rows x products x SUMS) float64, out
   * @param counts   address of (rows x products x KINDS) int32, out
   * @param whole    address of (rows) uint8, out: 1 where every sample is usable
   * @returns the first row that holds a usable sample beyond the limits, of which nothing is valid; rows when none does
   */
  prepareRows(
    from: number,
    rows: number,
    subbands: number,
    channels: number,
    polarizations: number,
    real: number,
    imag: number,
    weight: number,
    baseline: number,
    sign: number,
    bits: number,
    sums: number,
    counts: number,
    whole: number,
  ): number;
}

/** Where a row lies, in elements of its arrays. */
interface RowPlaces {
  readonly real: number;
  readonly imag: number;
  readonly weight: number;
  readonly bits: number;
}

export const plainPrepare: PrepareKernels = {
  prepareRows(
    from,
    rows,
    subbands,
    channels,
    polarizations,
    real,
    imag,
    weight,
    baseline,
    sign,
    bits,
    sums,
    counts,
    whole,
  ) {
    const { i32, u8 } = kernelMemory.heap;
    const products = subbands * polarizations;
    const samples = products * channels;
    for (let row = from; row < rows; row++) {
      if (i32[baseline / 4 + row] === AUTOCORRELATION) continue;
      let usable = 0;
      for (let product = 0; product < products; product++) {
        const first = firstOf(product, row * samples, channels, polarizations);
        const at = {
          real: real / 4 + first,
          imag: imag / 4 + first,
          weight: weight / 4 + first,
          bits: bits / 4 + first,
        };
        const count = counts / 4 + (row * products + product) * KINDS;
        const sum = sums / 8 + (row * products + product) * SUMS;
        if (!classify(at, channels, polarizations, count)) return row;
        addUp(at, channels, polarizations, (u8[sign + row]! << 24) >> 24, sum);
        usable += i32[count + USABLE]!;
      }
      u8[whole + row] = usable === samples ? 1 : 0;
    }
    return rows;
  },
};

function firstOf(product: number, row: number, channels: number, polarizations: number): number {
  return row + Math.floor(product / polarizations) * channels * polarizations + (product % polarizations);
}

/** Bits and counts of a product. @returns whether all that is usable is in range */
function classify(at: RowPlaces, channels: number, stride: number, count: number): boolean {
  const { f32, i32 } = kernelMemory.heap;
  const { fround } = Math;
  let flagged = 0;
  let bad = 0;
  let zero = 0;
  let weightless = 0;
  for (let i = 0; i < channels * stride; i += stride) {
    const w = f32[at.weight + i]!;
    const re = f32[at.real + i]!;
    const im = f32[at.imag + i]!;
    if (w <= 0 && w > Number.NEGATIVE_INFINITY) {
      i32[at.bits + i] = -FLAGGED;
      flagged += 1;
      if (w === 0) weightless += 1;
    } else if (!(w < Number.POSITIVE_INFINITY && w > 0)) {
      i32[at.bits + i] = -BAD;
      bad += 1;
    } else if (re === 0 && im === 0) {
      i32[at.bits + i] = -ZERO;
      zero += 1;
    } else if (!(Math.abs(re) < Number.POSITIVE_INFINITY && Math.abs(im) < Number.POSITIVE_INFINITY)) {
      i32[at.bits + i] = -BAD;
      bad += 1;
    } else {
      const power = fround(fround(re * re) + fround(im * im));
      if (!(w >= LEAST_WEIGHT && w <= MOST_WEIGHT && power >= LEAST_POWER && power <= MOST_POWER))
        return false;
      f32[at.bits + i] = Math.sqrt(power);
    }
  }
  i32[count + USABLE] = channels - flagged - bad - zero;
  i32[count + FLAGGED] = flagged;
  i32[count + BAD] = bad;
  i32[count + ZERO] = zero;
  i32[count + WEIGHTLESS] = weightless;
  return true;
}

/** (SUMS x 4) float64 sums of lanes. */
const lanes = new Float64Array(4 * SUMS);

/** Sums of a product, lane by lane, then all lanes. */
function addUp(at: RowPlaces, channels: number, polarizations: number, sign: number, sum: number): void {
  const { f64 } = kernelMemory.heap;
  const step = polarizations === 1 ? 4 : polarizations === 2 ? 2 : 1;
  lanes.fill(0);
  for (let lane = 0; lane < step; lane++) addLane(at, channels, polarizations, lane, step);
  for (let k = 0; k < SUMS; k++) {
    const first = 4 * k;
    const total = lanes[first]! + lanes[first + 1]! + (lanes[first + 2]! + lanes[first + 3]!);
    f64[sum + k] = k === LAYOUT.SUM_IMAG || k === LAYOUT.SLOPE_IMAG ? sign * total : total;
  }
}

function addLane(at: RowPlaces, channels: number, stride: number, lane: number, step: number): void {
  const { f32, i32 } = kernelMemory.heap;
  const { fround } = Math;
  for (let group = lane; group < channels; group += GROUP * step) {
    const end = Math.min(channels, group + GROUP * step);
    let sumReal = fround(0);
    let sumImag = fround(0);
    let sumAmplitude = fround(0);
    let sumWeight = fround(0);
    let sumSquare = fround(0);
    let slopeReal = fround(0);
    let slopeImag = fround(0);
    for (let c = group; c < end; c += step) {
      const i = c * stride;
      const kind = i32[at.bits + i]!;
      if (kind < 0) {
        if (kind === -FLAGGED) lanes[4 * LAYOUT.FLAGGED_WEIGHT + lane]! -= f32[at.weight + i]!;
        continue;
      }
      const re = f32[at.real + i]!;
      const im = f32[at.imag + i]!;
      const w = f32[at.weight + i]!;
      sumReal = fround(sumReal + fround(w * re));
      sumImag = fround(sumImag + fround(w * im));
      sumAmplitude = fround(sumAmplitude + f32[at.bits + i]!);
      sumWeight = fround(sumWeight + w);
      sumSquare = fround(sumSquare + fround(w * w));
      // A pair with an unusable channel adds nothing to the slope.
      if (c === 0 || i32[at.bits + i - stride]! < 0) continue;
      const br = f32[at.real + i - stride]!;
      const bi = f32[at.imag + i - stride]!;
      slopeReal = fround(slopeReal + fround(fround(re * br) + fround(im * bi)));
      slopeImag = fround(slopeImag + fround(fround(im * br) - fround(re * bi)));
    }
    lanes[4 * LAYOUT.SUM_REAL + lane]! += sumReal;
    lanes[4 * LAYOUT.SUM_IMAG + lane]! += sumImag;
    lanes[4 * LAYOUT.SUM_AMPLITUDE + lane]! += sumAmplitude;
    lanes[4 * LAYOUT.SUM_WEIGHT + lane]! += sumWeight;
    lanes[4 * LAYOUT.SUM_SQUARE + lane]! += sumSquare;
    lanes[4 * LAYOUT.SLOPE_REAL + lane]! += slopeReal;
    lanes[4 * LAYOUT.SLOPE_IMAG + lane]! += slopeImag;
  }
}

/** The kernels for rows of so many polarizations: three have no lanes of their own. */
export function prepareKernels(polarizations: number): PrepareKernels {
  return polarizations === 3
    ? plainPrepare
    : ((compiledKernels() as PrepareKernels | undefined) ?? plainPrepare);
}
