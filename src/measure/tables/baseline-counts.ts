/** Counts and weights of the baselines in the order of the result. */
import type { BaselineTally } from "../baseline-tally.ts";
import type { OtherBaselines } from "../other-baselines.ts";
import type { PairSet } from "../pair-set.ts";
import { BAD, FLAGGED, USABLE, WEIGHTLESS, ZERO } from "../prepared.ts";
import { Counts } from "./counts.ts";

export class BaselineCounts {
  private readonly tally: BaselineTally;
  private readonly order: Int32Array;
  /** (baselines x 4) usable, flagged, bad, zero */
  private readonly each: Float64Array;
  private readonly others: OtherBaselines;
  /** by antenna, its baselines that are not in the result */
  private readonly otherBaselines = new Map<number, number>();
  readonly all = new Counts();

  /**
   * @param order  the tally's number of each baseline, in the order of the result
   * @param others of the baselines that are not in the result
   * @param pairs  which those are
   */
  constructor(tally: BaselineTally, order: Int32Array, others: OtherBaselines, pairs: PairSet) {
    this.others = others;
    pairs.each((low, high) => {
      for (const antenna of [low, high]) {
        this.otherBaselines.set(antenna, (this.otherBaselines.get(antenna) ?? 0) + 1);
      }
    });
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
    this.all.add(countsBy((product, kind) => others.countOfAll(product, kind), tally.products));
  }

  /** How many baselines of an antenna are not in the result. */
  otherBaselinesOf(antenna: number): number {
    return this.otherBaselines.get(antenna) ?? 0;
  }

  /** Antennas of baselines that are not in the result. */
  get otherAntennas(): readonly number[] {
    return this.others.antennas;
  }

  /** Samples of an antenna on baselines that are not in the result. */
  ofOthers(antenna: number): Counts {
    return countsBy((product, kind) => this.others.count(antenna, product, kind), this.tally.products);
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
      weight += this.others.usableWeight(product);
      samples += this.others.countOfAll(product, USABLE);
      lost += this.others.flaggedWeight(product);
      unweighed += this.others.countOfAll(product, WEIGHTLESS) + this.others.countOfAll(product, BAD);
      usable += weight;
      if (samples > 0) lost += (unweighed * weight) / samples;
    }
    return 1 - Math.sqrt(usable / (usable + lost));
  }
}

function countsBy(count: (product: number, kind: number) => number, products: number): Counts {
  const counts = new Counts();
  for (let product = 0; product < products; product++) {
    counts.usable += count(product, USABLE);
    counts.flagged += count(product, FLAGGED);
    counts.bad += count(product, BAD);
    counts.zero += count(product, ZERO);
  }
  return counts;
}
