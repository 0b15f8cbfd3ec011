/** What the survey composes: each fills one kind of number, and any two of a kind add up to a third. */
import type { PreparedBlock } from "./prepared.ts";

export interface Accumulator {
  add(prepared: PreparedBlock): void;
  /**
   * Take over what another of the same kind has counted.
   *
   * @param baselines  for each of its baseline numbers, ours
   */
  merge(other: this, baselines: Int32Array): void;
}
