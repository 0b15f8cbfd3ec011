/** Baselines in the order they are met, lower antenna number first. */
import type { Baseline } from "./survey-result.ts";

/** Antenna numbers are below this in every encoding the readers know. */
const NUMBERS = 2 ** 26;

export class BaselineIndex {
  readonly baselines: Baseline[] = [];
  private readonly known = new Map<number, number>();
  // Rows of one baseline often follow each other, and those of one integration come in the same order each time.
  private lastKey = -1;
  private lastIndex = -1;

  /** Index of the baseline, which may be new. Either way round is the same one. */
  indexOf(antenna1: number, antenna2: number): number {
    const low = Math.min(antenna1, antenna2);
    const high = Math.max(antenna1, antenna2);
    const key = low * NUMBERS + high;
    if (key === this.lastKey) return this.lastIndex;
    let index = this.known.get(key);
    if (index === undefined) {
      index = this.baselines.length;
      this.baselines.push({ antenna1: low, antenna2: high });
      this.known.set(key, index);
    }
    this.lastKey = key;
    this.lastIndex = index;
    return index;
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
