/**
 * A block as the accumulators take it: each row's baseline, and of each sample what it is and its power. Made once a
 * block, so that no accumulator decides again what a usable sample is.
 */
import type { SampleBlock, Shape } from "../dataset/dataset.ts";
import type { BaselineIndex } from "./baseline-index.ts";

export const USABLE = 0;
export const FLAGGED = 1;
export const BAD = 2;
export const ZERO = 3;

/** An autocorrelation, which only the totals count. */
export const AUTOCORRELATION = -1;

export class PreparedBlock {
  readonly shape: Shape;
  readonly rowSamples: number;
  block!: SampleBlock;
  rows = 0;
  /** (rows) number in the BaselineIndex, or AUTOCORRELATION */
  baseline = new Int32Array(0);
  /** (rows) 1, or -1 where the row is stored with the higher antenna first: conjugate it, negate its u, v, w */
  sign = new Int8Array(0);
  /** (rows x samples of a row) what each sample is */
  kind = new Uint8Array(0);
  /** (rows x samples of a row) re² + im² of usable samples, 0 of others */
  power = new Float32Array(0);
  /** the bits of `power` */
  powerBits = new Int32Array(0);

  constructor(shape: Shape) {
    this.shape = shape;
    this.rowSamples = shape.subbands * shape.channels * shape.polarizations;
  }

  take(block: SampleBlock, index: BaselineIndex): void {
    this.block = block;
    this.rows = block.rows;
    this.grow(block.rows);
    for (let row = 0; row < block.rows; row++) {
      const antenna1 = block.antenna1[row]!;
      const antenna2 = block.antenna2[row]!;
      this.sign[row] = antenna1 > antenna2 ? -1 : 1;
      this.baseline[row] = antenna1 === antenna2 ? AUTOCORRELATION : index.indexOf(antenna1, antenna2);
    }
    fillKinds(block, this.rows * this.rowSamples, this.kind, this.power);
  }

  private grow(rows: number): void {
    if (this.baseline.length >= rows) return;
    this.baseline = new Int32Array(rows);
    this.sign = new Int8Array(rows);
    this.kind = new Uint8Array(rows * this.rowSamples);
    this.power = new Float32Array(rows * this.rowSamples);
    this.powerBits = new Int32Array(this.power.buffer);
  }
}

function fillKinds(block: SampleBlock, samples: number, kind: Uint8Array, power: Float32Array): void {
  const { real, imag, weight } = block;
  for (let i = 0; i < samples; i++) {
    const w = weight[i]!;
    const re = real[i]!;
    const im = imag[i]!;
    const p = re * re + im * im;
    power[i] = 0;
    if (w > 0 && w < Number.POSITIVE_INFINITY && p > 0 && p < Number.POSITIVE_INFINITY) {
      kind[i] = USABLE;
      power[i] = p;
    } else {
      kind[i] = kindOfOddSample(w, p);
    }
  }
}

/** A flag is a flag whatever value it hides; what is not finite is bad; exact zeros are no measurement. */
function kindOfOddSample(weight: number, power: number): number {
  if (weight <= 0 && weight > Number.NEGATIVE_INFINITY) return FLAGGED;
  if (!Number.isFinite(weight) || !Number.isFinite(power)) return BAD;
  return ZERO;
}
