/** The weights and noise of one row of a dataset, the products of an image added. */
import type { Dataset } from "../dataset/dataset.ts";

/** Which samples of a row count. */
export interface RowPart {
  /** (samples of a row) 1 for those that count */
  readonly mask: Uint8Array;
  /** sub-bands that hold any: first, and one past the last */
  readonly first: number;
  readonly last: number;
}

/** (subbands x channels) each; 0 where nothing is usable or counts. Outside the part's sub-bands they are stale. */
export class RowWeights {
  readonly weight: Float64Array;
  readonly noise: Float64Array;
  /** sub-bands that were filled last */
  first = 0;
  last = 0;
  private readonly products: Int32Array;
  private readonly polarizations: number;
  private readonly channels: number;
  private readonly subbands: number;

  constructor(dataset: Dataset, products: Int32Array) {
    const { subbands, channels, polarizations } = dataset.shape;
    this.weight = new Float64Array(subbands * channels);
    this.noise = new Float64Array(subbands * channels);
    this.products = products;
    this.polarizations = polarizations;
    this.channels = channels;
    this.subbands = subbands;
  }

  /** @param from,varianceFrom first sample of the row in `weights` and of the baseline in `variance` */
  fill(weights: Float32Array, from: number, variance: Float64Array, varianceFrom: number): void {
    this.first = 0;
    this.last = this.subbands;
    const { products, polarizations, weight, noise } = this;
    if (products.length === 2) {
      this.fillTwo(weights, from, variance, varianceFrom);
      return;
    }
    for (let c = 0; c < weight.length; c++) {
      let sum = 0;
      let noiseSum = 0;
      for (let i = 0; i < products.length; i++) {
        const offset = c * polarizations + products[i]!;
        const value = weights[from + offset]!;
        if (!(value > 0 && value < Number.POSITIVE_INFINITY)) continue;
        sum += value;
        noiseSum += value * variance[varianceFrom + offset]!;
      }
      weight[c] = sum;
      noise[c] = noiseSum;
    }
  }

  /** The same for the usual case of two products. */
  private fillTwo(weights: Float32Array, from: number, variance: Float64Array, varianceFrom: number): void {
    const { products, polarizations, weight, noise } = this;
    const second = products[1]! - products[0]!;
    let i = from + products[0]!;
    let v = varianceFrom + products[0]!;
    for (let c = 0; c < weight.length; c++, i += polarizations, v += polarizations) {
      const a = weights[i]!;
      const b = weights[i + second]!;
      const goodA = a > 0 && a < Number.POSITIVE_INFINITY;
      const goodB = b > 0 && b < Number.POSITIVE_INFINITY;
      weight[c] = (goodA ? a : 0) + (goodB ? b : 0);
      noise[c] = (goodA ? a * variance[v]! : 0) + (goodB ? b * variance[v + second]! : 0);
    }
  }

  /**
   * The weights that flagged samples had: a flag turns a weight negative. False, and nothing is filled, where the row
   * has none.
   */
  fillFlagged(weights: Float32Array, from: number): boolean {
    const { products, polarizations, weight } = this;
    let any = false;
    for (let c = 0; c < weight.length; c++) {
      let sum = 0;
      for (let i = 0; i < products.length; i++) {
        const value = weights[from + c * polarizations + products[i]!]!;
        if (value < 0 && value > Number.NEGATIVE_INFINITY) sum -= value;
      }
      if (sum > 0 && !any) {
        any = true;
        weight.fill(0, 0, c);
      }
      if (any) weight[c] = sum;
    }
    this.first = 0;
    this.last = this.subbands;
    return any;
  }

  /** As `fill`, for the samples of a part, or, with `inside` 0, for the others in the part's sub-bands. */
  fillPart(
    weights: Float32Array,
    from: number,
    variance: Float64Array,
    varianceFrom: number,
    part: RowPart,
    inside: 0 | 1,
  ): void {
    this.first = part.first;
    this.last = part.last;
    const { products, polarizations, weight, noise } = this;
    for (let c = part.first * this.channels; c < part.last * this.channels; c++) {
      let sum = 0;
      let noiseSum = 0;
      for (let i = 0; i < products.length; i++) {
        const offset = c * polarizations + products[i]!;
        const value = weights[from + offset]!;
        if (part.mask[offset] !== inside || !(value > 0 && value < Number.POSITIVE_INFINITY)) continue;
        sum += value;
        noiseSum += value * variance[varianceFrom + offset]!;
      }
      weight[c] = sum;
      noise[c] = noiseSum;
    }
  }
}
