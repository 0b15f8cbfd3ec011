/**
 * Baselines in the order they are met, lower antenna number first; of very many an even choice, and which others there
 * are.
 */
import { InputError } from "../util/errors.ts";
import { lot } from "./even-choice.ts";
import { OTHER } from "./kernels/layout.ts";
import { PairSet } from "./pair-set.ts";
import type { Baseline } from "./survey-result.ts";

/** Of 2048 antennas: beyond, antenna numbers are damaged more likely than real. */
const MOST_BASELINES = 1 << 21;
/** A pair of 32-bit numbers is an exact double while the first is below this. */
const EXACT = 1 << 21;

export class BaselineIndex {
  readonly baselines: Baseline[] = [];
  /** not among the choice */
  readonly others = new PairSet();
  /** those are chosen whose lot is below 2^-halvings */
  halvings = 0;
  private readonly known = new Map<number | string, number>();
  private low = new Int32Array(64);
  private high = new Int32Array(64);
  /** the baseline that last followed each: rows of one integration come in the same order each time */
  private follower = new Int32Array(64);
  private last = 0;

  /**
   * Index of the baseline, which may be new; OTHER where it is not chosen. Either way round is the same one.
   * @throws InputError when there are more baselines than any array has
   */
  indexOf(antenna1: number, antenna2: number): number {
    const low = Math.min(antenna1, antenna2);
    const high = Math.max(antenna1, antenna2);
    let index = this.last;
    if (this.low[index] !== low || this.high[index] !== high) index = this.follower[index]!;
    if (this.low[index] !== low || this.high[index] !== high || this.baselines.length === 0) {
      if (!this.chosen(low, high)) {
        this.others.add(low, high);
        if (this.others.size + this.baselines.length > MOST_BASELINES) throw tooMany();
        return OTHER;
      }
      index = this.find(low, high);
      this.follower[this.last] = index;
    }
    this.last = index;
    return index;
  }

  private chosen(low: number, high: number): boolean {
    return this.halvings === 0 || lot(low, high) * 2 ** this.halvings < 1;
  }

  /** Choose half as many. @returns for each index so far the new one; OTHER where it is not chosen any more */
  halve(): Int32Array {
    this.halvings += 1;
    const before = this.baselines.splice(0);
    this.known.clear();
    this.follower.fill(0);
    this.last = 0;
    return Int32Array.from(before, ({ antenna1, antenna2 }) => {
      if (this.chosen(antenna1, antenna2)) return this.find(antenna1, antenna2);
      this.others.add(antenna1, antenna2);
      return OTHER;
    });
  }

  private find(low: number, high: number): number {
    const key = Math.abs(low) < EXACT ? low * 2 ** 32 + high : `${low} ${high}`;
    const known = this.known.get(key);
    if (known !== undefined) return known;
    const index = this.baselines.length;
    if (index + this.others.size === MOST_BASELINES) throw tooMany();
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

function tooMany(): InputError {
  return new InputError(
    `the rows name more than ${MOST_BASELINES} baselines: expected at most those of 2048 antennas`,
    {},
    "The antenna numbers are damaged",
  );
}
