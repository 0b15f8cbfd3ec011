/** The weights and noise of one row of a dataset, the products of an image added. */
import type { Dataset } from "../dataset/dataset.ts";

/** (subbands x channels) each; 0 where nothing is usable. */
export class RowWeights {
  readonly weight: Float64Array;
  readonly noise: Float64Array;
  private readonly products: Int32Array;
  private readonly polarizations: number;

  constructor(dataset: Dataset, products: Int32Array) {
    const { subbands, channels, polarizations } = dataset.shape;
    this.weight = new Float64Array(subbands * channels);
    this.noise = new Float64Array(subbands * channels);
    this.products = products;
    this.polarizations = polarizations;
  }

  /** @param from,varianceFrom first sample of the row in `weights` and of the baseline in `variance` */
  fill(weights: Float32Array, from: number, variance: Float64Array, varianceFrom: number): void {
    const { products, polarizations, weight, noise } = this;
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
}
