/**
 * A block as the accumulators take it: each row's baseline, of each sample what it is and its amplitude, of each
 * product of a row its sums over channels. Made once a block, so that no accumulator decides again what a usable sample
 * is, and samples are looked at once.
 */
import type { SampleBlock, Shape } from "../dataset/dataset.ts";
import type { BaselineIndex } from "./baseline-index.ts";

/** What a sample is. A flag is a flag whatever value it hides; exact zeros with a weight are no measurement. */
export const USABLE = 0;
export const FLAGGED = 1;
export const BAD = 2;
export const ZERO = 3;
/** Counts a product: by what its samples are, and of the flagged those with a weight of zero. */
export const WEIGHTLESS = 4;
export const KINDS = 5;

/** Sums a product, over channels; all but those of flagged ones of usable samples. */
export const SUM_REAL = 0;
export const SUM_IMAG = 1;
export const SUM_AMPLITUDE = 2;
export const SUM_WEIGHT = 3;
export const SLOPE_REAL = 4;
export const SLOPE_IMAG = 5;
/** |weight| of flagged samples */
export const FLAGGED_WEIGHT = 6;
/** weight squared */
export const SUM_SQUARE = 7;
export const SUMS = 8;

/** An autocorrelation, which only the totals count. */
export const AUTOCORRELATION = -1;

export class PreparedBlock {
  readonly shape: Shape;
  readonly rowSamples: number;
  readonly products: number;
  block!: SampleBlock;
  rows = 0;
  /** (rows) number in the BaselineIndex, or AUTOCORRELATION: nothing below is filled for such a row */
  baseline = new Int32Array(0);
  /** (rows) 1, or -1 where the row is stored with the higher antenna first: conjugate it, negate its u, v, w */
  sign = new Int8Array(0);
  /** (rows x samples of a row) the bits of the float32 amplitude of a usable sample; of others minus what they are */
  bits = new Int32Array(0);
  /** the same memory as `bits` */
  private amplitude = new Float32Array(0);
  /** (rows x products x SUMS) of the visibility with the lower antenna first */
  sums = new Float64Array(0);
  /** (rows x products x KINDS) */
  counts = new Uint32Array(0);
  /** (rows) 1 where every sample is usable */
  whole = new Uint8Array(0);

  constructor(shape: Shape) {
    this.shape = shape;
    this.rowSamples = shape.subbands * shape.channels * shape.polarizations;
    this.products = shape.subbands * shape.polarizations;
  }

  take(block: SampleBlock, index: BaselineIndex): void {
    this.block = block;
    this.rows = block.rows;
    this.grow(block.rows);
    const { baseline, sign, whole, rowSamples } = this;
    const { antenna1, antenna2 } = block;
    for (let row = 0; row < block.rows; row++) {
      const first = antenna1[row]!;
      const second = antenna2[row]!;
      if (first === second) {
        baseline[row] = AUTOCORRELATION;
        continue;
      }
      sign[row] = first > second ? -1 : 1;
      baseline[row] = index.indexOf(first, second);
      whole[row] = this.takeRow(row) === rowSamples ? 1 : 0;
    }
  }

  /** @returns usable samples */
  private takeRow(row: number): number {
    const { subbands, channels, polarizations } = this.shape;
    const { counts } = this;
    let product = row * this.products;
    let usable = 0;
    for (let s = 0; s < subbands; s++) {
      const first = row * this.rowSamples + s * channels * polarizations;
      for (let p = 0; p < polarizations; p++, product++) {
        this.takeProduct(first + p, product, this.sign[row]!);
        usable += counts[product * KINDS]!;
      }
    }
    return usable;
  }

  private takeProduct(first: number, product: number, sign: number): void {
    const { amplitude, bits, sums, counts } = this;
    const { real, imag, weight } = this.block;
    const { channels, polarizations } = this.shape;
    const end = first + channels * polarizations;
    let sumReal = 0;
    let sumImag = 0;
    let sumAmplitude = 0;
    let sumWeight = 0;
    let sumSquare = 0;
    let slopeReal = 0;
    let slopeImag = 0;
    let flaggedWeight = 0;
    let flagged = 0;
    let bad = 0;
    let zero = 0;
    let weightless = 0;
    // Zero before the first channel and after an unusable one: such a pair adds nothing to the slope.
    let beforeReal = 0;
    let beforeImag = 0;
    for (let i = first; i < end; i += polarizations) {
      const w = weight[i]!;
      if (w > 0 && w < Number.POSITIVE_INFINITY) {
        const re = real[i]!;
        const im = imag[i]!;
        // Squares of float32s neither overflow nor vanish in a double.
        const power = re * re + im * im;
        if (power > 0 && power < Number.POSITIVE_INFINITY) {
          const a = Math.sqrt(power);
          amplitude[i] = a;
          sumReal += w * re;
          sumImag += w * im;
          sumAmplitude += a;
          sumWeight += w;
          sumSquare += w * w;
          slopeReal += re * beforeReal + im * beforeImag;
          slopeImag += im * beforeReal - re * beforeImag;
          beforeReal = re;
          beforeImag = im;
          continue;
        }
        if (power === 0) {
          bits[i] = -ZERO;
          zero += 1;
        } else {
          bits[i] = -BAD;
          bad += 1;
        }
      } else if (w <= 0 && w > Number.NEGATIVE_INFINITY) {
        bits[i] = -FLAGGED;
        flagged += 1;
        flaggedWeight -= w;
        if (w === 0) weightless += 1;
      } else {
        bits[i] = -BAD;
        bad += 1;
      }
      beforeReal = 0;
      beforeImag = 0;
    }
    const sum = product * SUMS;
    sums[sum + SUM_REAL] = sumReal;
    sums[sum + SUM_IMAG] = sign * sumImag;
    sums[sum + SUM_AMPLITUDE] = sumAmplitude;
    sums[sum + SUM_WEIGHT] = sumWeight;
    sums[sum + SLOPE_REAL] = slopeReal;
    sums[sum + SLOPE_IMAG] = sign * slopeImag;
    sums[sum + FLAGGED_WEIGHT] = flaggedWeight;
    sums[sum + SUM_SQUARE] = sumSquare;
    const count = product * KINDS;
    counts[count + USABLE] = channels - flagged - bad - zero;
    counts[count + FLAGGED] = flagged;
    counts[count + BAD] = bad;
    counts[count + ZERO] = zero;
    counts[count + WEIGHTLESS] = weightless;
  }

  private grow(rows: number): void {
    if (this.baseline.length >= rows) return;
    this.baseline = new Int32Array(rows);
    this.sign = new Int8Array(rows);
    this.whole = new Uint8Array(rows);
    this.bits = new Int32Array(rows * this.rowSamples);
    this.amplitude = new Float32Array(this.bits.buffer);
    this.sums = new Float64Array(rows * this.products * SUMS);
    this.counts = new Uint32Array(rows * this.products * KINDS);
  }
}
