/** Distinct times in bounded memory, the same whatever order they are met in. */

import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** Times kept apart: 32 MB. Beyond, they are rounded to ever coarser steps. */
const MOST = 1 << 22;
/** First rounding, days: 5.15 ms, a float32 step of a day fraction. A power of two, so that rounding is exact. */
const FIRST_STEP = 2 ** -24;

export class TimeList {
  private readonly most: number;
  /** the first `kept` are distinct and ascending, those after them as they were met */
  private times = new Float64Array(256);
  private kept = 0;
  private length = 0;
  /** days that times are rounded down to; 0 as they are */
  private step = 0;

  constructor(most = MOST) {
    this.most = most;
  }

  /** @param time MJD, finite */
  add(time: number): void {
    if (this.length === this.times.length) this.tidy();
    this.times[this.length++] = time;
  }

  merge(other: TimeList): void {
    other.tidy();
    while (this.step < other.step) this.coarsen();
    for (let i = 0; i < other.kept; i++) this.add(other.times[i]!);
  }

  state(): StateRecord {
    return { times: this.sorted, step: this.step };
  }

  restore(from: StateReader): void {
    const times = from.finite(Float64Array, "times");
    this.step = from.number("step");
    if (this.step !== 0 && !(this.step >= FIRST_STEP && this.step < Number.POSITIVE_INFINITY)) {
      throw from.error(`${this.step} is no step`, "step");
    }
    for (const time of times) this.add(time);
  }

  /** MJD ascending. */
  get sorted(): Float64Array {
    this.tidy();
    return this.times.slice(0, this.kept);
  }

  /**
   * Sort, drop what is there twice, and make room. The step is the first at which all the times fit; how many distinct
   * ones there are at a step does not depend on their order.
   */
  private tidy(): void {
    this.dropRepeated();
    while (this.kept > this.most) this.coarsen();
    if (2 * this.kept > this.times.length) {
      const grown = new Float64Array(2 * this.times.length);
      grown.set(this.times.subarray(0, this.kept));
      this.times = grown;
    }
  }

  private dropRepeated(): void {
    if (this.kept === this.length) return;
    const { step } = this;
    const all = this.times.subarray(0, this.length);
    if (step > 0) for (let i = this.kept; i < all.length; i++) all[i] = Math.floor(all[i]! / step) * step;
    all.sort();
    let kept = 0;
    for (let i = 0; i < all.length; i++) {
      if (i === 0 || all[i] !== all[kept - 1]) all[kept++] = all[i]!;
    }
    this.kept = kept;
    this.length = kept;
  }

  private coarsen(): void {
    this.dropRepeated();
    this.step = this.step === 0 ? FIRST_STEP : 2 * this.step;
    this.kept = 0;
    this.dropRepeated();
  }
}
