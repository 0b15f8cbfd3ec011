/**
 * Scores added over baselines: what is too faint on each stands out on all. Kept apart by length, since some
 * interference is seen by short baselines alone. Sums are of whole numbers, the same in any order.
 */
import type { Survey } from "../../measure/survey-result.ts";
import { lengthOrder } from "./lengths.ts";

/** Quarters of the baselines by length. */
export const LENGTH_GROUPS = 4;
/** Scores are rounded to this. */
const QUANTUM = 1 / 64;
/** Sums that are kept at most: with more, neighbouring integrations share one. */
const MOST_SUMS = 1 << 24;

export class CombinedScores {
  /** channels of all sub-bands, and products */
  readonly columns: number;
  readonly polarizations: number;
  /** bins of time, and integrations in each */
  readonly steps: number;
  readonly perStep: number;
  /** (baselines) quarter by length, 0 the shortest */
  readonly group: Uint8Array;
  /** (groups x steps x columns x polarizations) */
  private readonly sums: Int32Array;
  private readonly counts: Uint32Array;

  constructor(survey: Survey) {
    const { subbands, channels, polarizations } = survey.dataset.shape;
    this.columns = subbands * channels;
    this.polarizations = polarizations;
    const each = LENGTH_GROUPS * this.columns * polarizations;
    this.perStep = Math.max(1, Math.ceil((survey.times.length * each) / MOST_SUMS));
    this.steps = Math.ceil(survey.times.length / this.perStep);
    this.sums = new Int32Array(this.steps * each);
    this.counts = new Uint32Array(this.steps * each);
    this.group = groupsByLength(survey);
  }

  /** Bin of an integration. */
  stepOf(time: number): number {
    return Math.floor(time / this.perStep);
  }

  /**
   * Add a row's scores of consecutive columns of one polarization.
   *
   * @param time index into Survey.times
   */
  add(
    baseline: number,
    time: number,
    firstColumn: number,
    polarization: number,
    scores: Float32Array,
    marks: Uint8Array,
    from: number,
    columns: number,
  ): void {
    const { sums, counts, polarizations } = this;
    let at = this.place(this.group[baseline]!, this.stepOf(time), firstColumn, polarization);
    for (let i = from; i < from + columns; i++, at += polarizations) {
      if (marks[i] === 2) continue;
      sums[at]! += Math.round(scores[i]! / QUANTUM);
      counts[at]! += 1;
    }
  }

  private place(group: number, step: number, column: number, polarization: number): number {
    return ((group * this.steps + step) * this.columns + column) * this.polarizations + polarization;
  }

  /**
   * Normalised sums of some columns over the shortest `groups` quarters of the baselines.
   *
   * @param polarization index, or null: all together
   * @param scores (steps x columns) out: variance 1 in noise, 0 where nothing is usable
   * @param marks  (steps x columns) out: 2 where nothing is usable, else 0
   * @param samples (steps x columns) out: scores that were added
   */
  fill(
    groups: number,
    firstColumn: number,
    columns: number,
    polarization: number | null,
    scores: Float32Array,
    marks: Uint8Array,
    samples?: Float32Array,
  ): void {
    const from = polarization ?? 0;
    const to = polarization === null ? this.polarizations : from + 1;
    for (let step = 0; step < this.steps; step++) {
      for (let c = 0; c < columns; c++) {
        let sum = 0;
        let count = 0;
        for (let group = 0; group < groups; group++) {
          const at = this.place(group, step, firstColumn + c, 0);
          for (let p = from; p < to; p++) {
            sum += this.sums[at + p]!;
            count += this.counts[at + p]!;
          }
        }
        scores[step * columns + c] = count === 0 ? 0 : (sum * QUANTUM) / Math.sqrt(count);
        marks[step * columns + c] = count === 0 ? 2 : 0;
        if (samples !== undefined) samples[step * columns + c] = count;
      }
    }
  }
}

function groupsByLength(survey: Survey): Uint8Array {
  const order = lengthOrder(survey);
  const group = new Uint8Array(order.length);
  for (const [rank, baseline] of order.entries()) {
    group[baseline] = Math.min(LENGTH_GROUPS - 1, Math.floor((LENGTH_GROUPS * rank) / order.length));
  }
  return group;
}
