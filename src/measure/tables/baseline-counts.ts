/** Counts and weights of the baselines in the order of the result. */
import type { BaselineTally } from "../baseline-tally.ts";
import { BAD, FLAGGED, USABLE, WEIGHTLESS, ZERO } from "../prepared.ts";
import { Counts } from "./counts.ts";

export class BaselineCounts {
  private readonly tally: BaselineTally;
  private readonly order: Int32Array;
  private readonly each: readonly Counts[];
  readonly all = new Counts();

  /** @param order  the tally's number of each baseline, in the order of the result */
  constructor(tally: BaselineTally, order: Int32Array) {
    this.tally = tally;
    this.order = order;
    this.each = Array.from(order, (number) => {
      const counts = new Counts();
      for (let product = 0; product < tally.products; product++) {
        counts.usable += tally.count(number, product, USABLE);
        counts.flagged += tally.count(number, product, FLAGGED);
        counts.bad += tally.count(number, product, BAD);
        counts.zero += tally.count(number, product, ZERO);
      }
      return counts;
    });
    for (const counts of this.each) this.all.add(counts);
  }

  of(baseline: number): Counts {
    return this.each[baseline]!;
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
