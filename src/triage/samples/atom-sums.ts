/** Weighted sums of samples by baseline, time and channel. */
import type { Bins } from "./bins.ts";

export class AtomSums {
  readonly weight: Float64Array;
  readonly frequency: Float64Array;
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly w: Float64Array;
  readonly re: Float64Array;
  readonly im: Float64Array;
  private readonly bins: Bins;

  constructor(bins: Bins, baselines: number) {
    const size = baselines * bins.times * bins.channels;
    this.bins = bins;
    this.weight = new Float64Array(size);
    this.frequency = new Float64Array(size);
    this.u = new Float64Array(size);
    this.v = new Float64Array(size);
    this.w = new Float64Array(size);
    this.re = new Float64Array(size);
    this.im = new Float64Array(size);
  }

  /** @param u,v,w seconds of light travel */
  add(
    baseline: number,
    time: number,
    channel: number,
    weight: number,
    nu: number,
    u: number,
    v: number,
    w: number,
    re: number,
    im: number,
  ): void {
    const at = (baseline * this.bins.times + time) * this.bins.channels + channel;
    this.weight[at]! += weight;
    this.frequency[at]! += weight * nu;
    this.u[at]! += weight * nu * u;
    this.v[at]! += weight * nu * v;
    this.w[at]! += weight * nu * w;
    this.re[at]! += weight * re;
    this.im[at]! += weight * im;
  }

  /** Places that any sample went to, ascending. */
  filled(): Uint32Array {
    let count = 0;
    for (const weight of this.weight) if (weight > 0) count += 1;
    const places = new Uint32Array(count);
    let at = 0;
    this.weight.forEach((weight, i) => {
      if (weight > 0) places[at++] = i;
    });
    return places;
  }
}
