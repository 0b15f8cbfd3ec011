/** Baselines in the order they are met, lower antenna number first. */
import { InputError } from "../util/errors.ts";
import type { Baseline } from "./survey-result.ts";

/** Of 2048 antennas: beyond, antenna numbers are damaged more likely than real. */
const MOST_BASELINES = 1 << 21;
/** A pair of 32-bit numbers is an exact double while the first is below this. */
const EXACT = 1 << 21;

export class BaselineIndex {
  readonly baselines: Baseline[] = [];
  private readonly known = new Map<number | string, number>();
  private low = new Int32Array(64);
  private high = new Int32Array(64);
  /** the baseline that last followed each: rows of one integration come in the same order each time */
  private follower = new Int32Array(64);
  private last = 0;

  /**
   * Index of the baseline, which may be new. Either way round is the same one.
   * @throws InputError when there are more baselines than any array has
   */
  indexOf(antenna1: number, antenna2: number): number {
    const low = Math.min(antenna1, antenna2);
    const high = Math.max(antenna1, antenna2);
    let index = this.last;
    if (this.low[index] !== low || this.high[index] !== high) index = this.follower[index]!;
    if (this.low[index] !== low || this.high[index] !== high || this.baselines.length === 0) {
      index = this.find(low, high);
      this.follower[this.last] = index;
    }
    this.last = index;
    return index;
  }

  private find(low: number, high: number): number {
    const key = Math.abs(low) < EXACT ? low * 2 ** 32 + high : `${low} ${high}`;
    const known = this.known.get(key);
    if (known !== undefined) return known;
    const index = this.baselines.length;
    if (index === MOST_BASELINES) {
      throw new InputError(
        `the rows name more than ${MOST_BASELINES} baselines: expected at most those of 2048 antennas`,
        {},
        "The antenna numbers are damaged",
      );
    }
    if (index === this.low.length) this.grow();
    this.low[index] = low;
    this.high[index] = high;
    this.baselines.push({ antenna1: low, antenna2: high });
    this.known.set(key, index);
    return index;
  }

  private grow(): void {
    const longer = (array: Int32Array<ArrayBuffer>) => {
      const grown = new Int32Array(2 * array.length);
      grown.set(array);
      return grown;
    };
    this.low = longer(this.low);
    this.high = longer(this.high);
    this.follower = longer(this.follower);
  }

  /** New index of each baseline when they are sorted by antenna1, then antenna2. */
  sortedPlaces(): Int32Array {
    const order = this.baselines.map((_, i) => i);
    order.sort((i, j) => {
      const [a, b] = [this.baselines[i]!, this.baselines[j]!];
      return a.antenna1 - b.antenna1 || a.antenna2 - b.antenna2;
    });
    const places = new Int32Array(order.length);
    for (const [place, index] of order.entries()) places[index] = place;
    return places;
  }
}
