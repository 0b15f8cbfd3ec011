/** The sums over channels that a track cell keeps of one row, by sub-band and polarization. */
import type { Shape } from "../dataset/dataset.ts";
import { type PreparedBlock, USABLE } from "./prepared.ts";

/** Numbers a product: weighted real, weighted imaginary, amplitude, weight, slope real, slope imaginary. */
export const SUMS = 6;
/** Counts a product: usable, flagged, bad, zero. */
export const KINDS = 4;

export class RowSums {
  private readonly shape: Shape;
  /** (subbands x polarizations x SUMS) */
  readonly sums: Float64Array;
  /** (subbands x polarizations x KINDS) */
  readonly counts: Uint32Array;

  constructor(shape: Shape) {
    this.shape = shape;
    this.sums = new Float64Array(shape.subbands * shape.polarizations * SUMS);
    this.counts = new Uint32Array(shape.subbands * shape.polarizations * KINDS);
  }

  /** @returns nothing: `sums` and `counts` hold the row until the next is taken */
  take(prepared: PreparedBlock, row: number): void {
    const { subbands, polarizations, channels } = this.shape;
    const sign = prepared.sign[row]!;
    let product = 0;
    for (let s = 0; s < subbands; s++) {
      const first = row * prepared.rowSamples + s * channels * polarizations;
      for (let p = 0; p < polarizations; p++, product++) this.takeProduct(prepared, first + p, product, sign);
    }
  }

  private takeProduct(prepared: PreparedBlock, first: number, product: number, sign: number): void {
    const { kind, power } = prepared;
    const { real, imag, weight } = prepared.block;
    const { counts, sums } = this;
    const { channels, polarizations } = this.shape;
    const at = product * KINDS;
    counts.fill(0, at, at + KINDS);
    let sumReal = 0;
    let sumImag = 0;
    let sumAmplitude = 0;
    let sumWeight = 0;
    let slopeReal = 0;
    let slopeImag = 0;
    let before = false;
    let beforeReal = 0;
    let beforeImag = 0;
    for (let c = 0, i = first; c < channels; c++, i += polarizations) {
      const what = kind[i]!;
      counts[at + what]! += 1;
      if (what !== USABLE) {
        before = false;
        continue;
      }
      const re = real[i]!;
      const im = sign * imag[i]!;
      const w = weight[i]!;
      sumReal += w * re;
      sumImag += w * im;
      sumAmplitude += Math.sqrt(power[i]!);
      sumWeight += w;
      if (before) {
        slopeReal += re * beforeReal + im * beforeImag;
        slopeImag += im * beforeReal - re * beforeImag;
      }
      before = true;
      beforeReal = re;
      beforeImag = im;
    }
    const out = product * SUMS;
    sums[out] = sumReal;
    sums[out + 1] = sumImag;
    sums[out + 2] = sumAmplitude;
    sums[out + 3] = sumWeight;
    sums[out + 4] = slopeReal;
    sums[out + 5] = slopeImag;
  }
}
