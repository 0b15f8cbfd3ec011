/** Counts and weights of the baselines in the order of the result. */
import type { BaselineTally } from "../baseline-tally.ts";
import { BAD, FLAGGED, USABLE, WEIGHTLESS, ZERO } from "../prepared.ts";
import { Counts } from "./counts.ts";

export class BaselineCounts {
  private readonly tally: BaselineTally;
  private readonly order: Int32Array;
  /** (baselines x 4) usable, flagged, bad, zero */
  private readonly each: Float64Array;
  readonly all = new Counts();

  /** @param order  the tally's number of each baseline, in the order of the result */
  constructor(tally: BaselineTally, order: Int32Array) {
    this.tally = tally;
    this.order = order;
    this.each = new Float64Array(4 * order.length);
    for (let b = 0; b < order.length; b++) {
      for (let product = 0; product < tally.products; product++) {
        for (const [i, kind] of [USABLE, FLAGGED, BAD, ZERO].entries()) {
          this.each[4 * b + i]! += tally.count(order[b]!, product, kind);
        }
      }
      this.all.add(this.of(b));
    }
  }

  of(baseline: number): Counts {
    const counts = new Counts();
    counts.usable = this.each[4 * baseline]!;
    counts.flagged = this.each[4 * baseline + 1]!;
    counts.bad = this.each[4 * baseline + 2]!;
    counts.zero = this.each[4 * baseline + 3]!;
    return counts;
  }

  /** Typical weight of a usable sample of some products of a baseline; NaN without any. */
  meanWeight(baseline: number, products: readonly number[]): number {
    const number = this.order[baseline]!;
    let weight = 0;
    let samples = 0;
    for (const product of products) {
      weight += this.tally.usableWeight(number, product);
      samples += this.tally.count(number, product, USABLE);
    }
    return weight / samples;
  }

  /**
   * Sensitivity of natural weighting lost to flags and bad values: 1 - sqrt(usable weight / all weight). A flagged
   * sample had |weight| before; one whose weight is 0 or not finite is given the mean usable one of its product.
   *
   * @param products  those that count
   * @returns NaN where they have no usable sample
   */
  sensitivityLost(products: readonly number[]): number {
    let usable = 0;
    let lost = 0;
    for (const product of products) {
      let weight = 0;
      let samples = 0;
      let unweighed = 0;
      for (const number of this.order) {
        weight += this.tally.usableWeight(number, product);
        samples += this.tally.count(number, product, USABLE);
        lost += this.tally.flaggedWeight(number, product);
        unweighed += this.tally.count(number, product, WEIGHTLESS) + this.tally.count(number, product, BAD);
      }
      usable += weight;
      if (samples > 0) lost += (unweighed * weight) / samples;
    }
    return 1 - Math.sqrt(usable / (usable + lost));
  }
}
