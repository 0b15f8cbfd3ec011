/**
 * Scores added over baselines: what is too faint on each stands out on all. Kept apart by length, since some
 * interference is seen by short baselines alone. Sums are of whole numbers, the same in any order.
 */
import type { Survey } from "../../measure/survey-result.ts";
import { lengthOrder } from "./lengths.ts";
import type { ScoreSums } from "./tile-result.ts";

/** Quarters of the baselines by length. */
export const LENGTH_GROUPS = 4;
/** Scores are rounded to this. */
const STEPS_PER_SIGMA = 64;
const QUANTUM = 1 / STEPS_PER_SIGMA;
/** Sums that are kept at most: with more, neighbouring integrations share one. */
const MOST_SUMS = 1 << 24;

/** How scores are summed up. */
export interface ScoreForm {
  /** channels of all sub-bands, and products */
  readonly columns: number;
  readonly polarizations: number;
  /** bins of time, and integrations in each */
  readonly steps: number;
  readonly perStep: number;
  /** (baselines) quarter by length, 0 the shortest */
  readonly group: Uint8Array;
}

/** @param mostSteps bins of time at most */
export function scoreForm(survey: Survey, mostSteps = Number.POSITIVE_INFINITY): ScoreForm {
  const { subbands, channels, polarizations } = survey.dataset.shape;
  const columns = subbands * channels;
  const each = LENGTH_GROUPS * columns * polarizations;
  const times = survey.times.length;
  const perStep = Math.max(1, Math.ceil((times * each) / MOST_SUMS), Math.ceil(times / mostSteps));
  return {
    columns,
    polarizations,
    steps: Math.ceil(times / perStep),
    perStep,
    group: groupsByLength(survey),
  };
}

export class CombinedScores implements ScoreForm {
  readonly columns: number;
  readonly polarizations: number;
  readonly steps: number;
  readonly perStep: number;
  readonly group: Uint8Array;
  /** (groups x steps x columns x polarizations) */
  private readonly sums: Int32Array;
  private readonly counts: Uint32Array;

  /** @param form of one that is there, or a form of its own */
  constructor(form: ScoreForm) {
    this.columns = form.columns;
    this.polarizations = form.polarizations;
    this.perStep = form.perStep;
    this.steps = form.steps;
    this.group = form.group;
    const size = LENGTH_GROUPS * this.steps * this.columns * this.polarizations;
    this.sums = new Int32Array(size);
    this.counts = new Uint32Array(size);
  }

  /** Bin of an integration. */
  stepOf(time: number): number {
    return Math.floor(time / this.perStep);
  }

  /** Add the sums of a tile. */
  add({ firstStep, steps, sums, counts }: ScoreSums): void {
    const each = steps * this.columns * this.polarizations;
    for (let group = 0; group < LENGTH_GROUPS; group++) {
      const from = group * each;
      const to = this.place(group, firstStep, 0, 0);
      for (let i = 0; i < each; i++) {
        this.sums[to + i]! += sums[from + i]!;
        this.counts[to + i]! += counts[from + i]!;
      }
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

/** Sums of the scores of one tile, as they grow. */
export class TileScores implements ScoreSums {
  readonly firstStep: number;
  readonly steps: number;
  readonly sums: Int32Array<ArrayBuffer>;
  readonly counts: Uint32Array<ArrayBuffer>;
  private readonly form: ScoreForm;

  /** @param firstTime,lastTime indices into Survey.times of the rows to come */
  constructor(form: ScoreForm, firstTime: number, lastTime: number) {
    this.form = form;
    this.firstStep = Math.floor(firstTime / form.perStep);
    this.steps = Math.floor(lastTime / form.perStep) - this.firstStep + 1;
    const size = LENGTH_GROUPS * this.steps * form.columns * form.polarizations;
    this.sums = new Int32Array(size);
    this.counts = new Uint32Array(size);
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
    const { sums, counts } = this;
    const { group, perStep, polarizations } = this.form;
    const step = Math.floor(time / perStep) - this.firstStep;
    let at =
      ((group[baseline]! * this.steps + step) * this.form.columns + firstColumn) * polarizations +
      polarization;
    for (let i = from; i < from + columns; i++, at += polarizations) {
      if (marks[i] === 2) continue;
      // Rounded to the nearest: scores are far from the largest whole number.
      sums[at]! += Math.floor(scores[i]! * STEPS_PER_SIGMA + 0.5);
      counts[at]! += 1;
    }
  }

  /** What another thread can be sent. */
  plain(): ScoreSums {
    const { firstStep, steps, sums, counts } = this;
    return { firstStep, steps, sums, counts };
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
