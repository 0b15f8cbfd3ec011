/**
 * Whose sketches a row counts in: its baseline's, or, where the baselines are too many for one each, one of its two
 * antennas'. A baseline then has the level that its antennas have: what one shows more or less than the typical one, times
 * what the other does.
 */
import { median } from "../util/statistics.ts";
import type { BaselineIndex } from "./baseline-index.ts";
import type { PreparedBlock } from "./prepared.ts";

/** Antenna numbers go to 65535. */
const MOST_OWNERS = 1 << 16;
const SAME = Int32Array.from({ length: MOST_OWNERS }, (_, owner) => owner);

export class SketchOwners {
  /** antennas own the sketches */
  readonly shared: boolean;
  private readonly index: BaselineIndex;

  constructor(shared: boolean, index: BaselineIndex) {
    this.shared = shared;
    this.index = index;
  }

  ofRow({ baseline, block }: PreparedBlock, row: number): number {
    if (!this.shared) return baseline[row]!;
    const antenna1 = block.antenna1[row]!;
    const antenna2 = block.antenna2[row]!;
    // By turns, so that every antenna owns half of its baselines.
    return ((antenna1 + antenna2) % 2 === 0 ? antenna1 : antenna2) & (MOST_OWNERS - 1);
  }

  /** For each owner of another part, ours. @param baselines for each of its baselines, ours */
  joined(baselines: Int32Array): Int32Array {
    return this.shared ? SAME : baselines;
  }

  /** How many there may be. */
  count(baselines: number): number {
    return this.shared ? MOST_OWNERS : baselines;
  }

  /** A reader of one number of each baseline. @param ofOwner the number of an owner; NaN where it has none */
  reader(ofOwner: (owner: number) => number): (baseline: number) => number {
    if (!this.shared) return ofOwner;
    const known = new Map<number, number>();
    for (const { antenna1, antenna2 } of this.index.baselines) {
      for (const antenna of [antenna1, antenna2]) {
        const owner = antenna & (MOST_OWNERS - 1);
        if (!known.has(owner)) known.set(owner, ofOwner(owner));
      }
    }
    const typical = median([...known.values()]);
    return (baseline) => {
      const { antenna1, antenna2 } = this.index.baselines[baseline]!;
      const one = known.get(antenna1 & (MOST_OWNERS - 1))!;
      const other = known.get(antenna2 & (MOST_OWNERS - 1))!;
      if (Number.isNaN(one)) return other;
      return Number.isNaN(other) ? one : (one * other) / typical;
    };
  }
}
