/** What the survey composes: each fills one kind of number, and any two of a kind add up to a third. */
import type { OtherBaselines } from "./other-baselines.ts";
import type { PreparedBlock } from "./prepared.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";
import type { Baseline } from "./survey-result.ts";

export interface Accumulator {
  add(prepared: PreparedBlock): void;
  /**
   * Take over what another of the same kind has counted.
   *
   * @param baselines  for each of its baseline numbers, ours
   */
  merge(other: this, baselines: Int32Array): void;
  /**
   * Give up the baselines that are not chosen any more.
   *
   * @param baselines  for each baseline number so far, the new one, in the same order; OTHER where it is given up
   * @param before     the baselines by their numbers so far
   * @param others     takes what is kept of those that are given up
   */
  thin?(baselines: Int32Array, before: readonly Baseline[], others: OtherBaselines): void;
  /** What it holds, as plain data for another thread or a file: arrays are its own. It is not to be used after. */
  state(): StateRecord;
  /**
   * Take over a state. This was just made, of the same dataset and settings.
   *
   * @param baselines  how many baselines there are
   * @param setups     how many frequency setups the dataset has
   * @throws InputError where it is no state of such an accumulator
   */
  restore(from: StateReader, baselines: number, setups: number): void;
  /** Give back what it holds of the kernels' memory, which no collector takes. It is not to be used after. */
  release?(): void;
}
