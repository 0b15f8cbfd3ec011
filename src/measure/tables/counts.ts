/** The columns that every table of counts shares. */
import type { Row } from "../fill-measure.ts";
import type { Tracks } from "../survey-result.ts";

export class Counts {
  usable = 0;
  flagged = 0;
  bad = 0;
  zero = 0;

  add(other: Counts): void {
    this.usable += other.usable;
    this.flagged += other.flagged;
    this.bad += other.bad;
    this.zero += other.zero;
  }

  /** Add a product of a track cell. */
  addProduct(tracks: Tracks, i: number): void {
    this.usable += tracks.usable[i]!;
    this.flagged += tracks.flagged[i]!;
    this.bad += tracks.bad[i]!;
    this.zero += tracks.zero[i]!;
  }

  get samples(): number {
    return this.usable + this.flagged + this.bad + this.zero;
  }

  /** NaN where there is nothing but absent products. */
  get flaggedFraction(): number {
    return this.flagged / (this.samples - this.zero);
  }

  get row(): Row {
    const { samples, usable, flagged, bad, zero } = this;
    return {
      samples,
      usable,
      flagged,
      bad,
      zero,
      flagged_fraction: this.flaggedFraction,
      bad_fraction: bad / samples,
      zero_fraction: zero / samples,
    };
  }
}

/** Counts of what each track cell belongs to: an antenna, a field, a scan ... */
export function countCells(
  tracks: Tracks,
  products: number,
  groups: number,
  groupsOf: (cell: number) => readonly number[],
): Counts[] {
  const counts = Array.from({ length: groups }, () => new Counts());
  for (let cell = 0; cell < tracks.cells; cell++) {
    for (const group of groupsOf(cell)) {
      const count = counts[group];
      if (count === undefined) continue;
      for (let k = 0; k < products; k++) count.addProduct(tracks, cell * products + k);
    }
  }
  return counts;
}
