/** Marks of the second pass counted over baselines: integrations by channels. */

import { newBlock } from "../../dataset/new-block.ts";
import type { Selection } from "../../dataset/selection.ts";
import { compileSelections } from "../../dataset/selection-matcher.ts";
import type { Survey } from "../../measure/survey-result.ts";
import { ones } from "../pass/bits.ts";
import { ELEVATED_SHARE } from "../pass/marks.ts";
import type { SecondPass } from "../pass/second-pass.ts";
import { indexOfTime } from "../pass/time-axis.ts";

/** Integrations [firstStep, lastStep] by columns [low, high], ends included; columns count over all sub-bands. */
export interface Rectangle {
  readonly firstStep: number;
  readonly lastStep: number;
  readonly low: number;
  readonly high: number;
}

/** Which samples of a rectangle are meant. */
export interface Subset {
  /** (baselines) 1: meant; null: all */
  readonly baselines: Uint8Array | null;
  /** (polarizations) 1: meant; null: all */
  readonly polarizations: Uint8Array | null;
}

export const ALL: Subset = { baselines: null, polarizations: null };

/** No baseline's noise is known better than to this share of elevated samples. */
const LEAST_NOISE_SHARE = 0.005;

/** Samples by what the second pass saw. */
export interface Counts {
  usable: number;
  elevated: number;
  outlying: number;
  bright: number;
  /** log likelihood of `elevated` of `usable` where there is only noise */
  noise: number;
}

export function noCounts(): Counts {
  return { usable: 0, elevated: 0, outlying: 0, bright: 0, noise: 0 };
}

export function addCounts(to: Counts, from: Counts): void {
  to.usable += from.usable;
  to.elevated += from.elevated;
  to.outlying += from.outlying;
  to.bright += from.bright;
  to.noise += from.noise;
}

/** The cells of the tracks in order of their integrations. */
export class Grid {
  readonly survey: Survey;
  readonly pass: SecondPass;
  readonly steps: number;
  readonly columns: number;
  readonly polarizations: number;
  /** (cells) step of each cell */
  readonly stepOfCell: Int32Array;
  /** (steps + 1) into `cells` */
  readonly firstOfStep: Int32Array;
  /** cells ordered by step */
  readonly cells: Int32Array;
  /** (baselines) share of its samples that are elevated in noise: ELEVATED_SHARE, or less where its noise is overestimated */
  readonly noiseShare: Float64Array;

  constructor(survey: Survey, pass: SecondPass) {
    this.survey = survey;
    this.pass = pass;
    this.steps = pass.combined.steps;
    this.columns = pass.combined.columns;
    this.polarizations = pass.combined.polarizations;
    const { tracks, times } = survey;
    this.stepOfCell = new Int32Array(tracks.cells);
    this.firstOfStep = new Int32Array(this.steps + 1);
    for (let cell = 0; cell < tracks.cells; cell++) {
      const step = pass.combined.stepOf(indexOfTime(times, tracks.time[cell]!));
      this.stepOfCell[cell] = step;
      this.firstOfStep[step + 1]! += 1;
    }
    for (let step = 0; step < this.steps; step++) this.firstOfStep[step + 1]! += this.firstOfStep[step]!;
    const next = this.firstOfStep.slice();
    this.cells = new Int32Array(tracks.cells);
    for (let cell = 0; cell < tracks.cells; cell++) this.cells[next[this.stepOfCell[cell]!]!++] = cell;
    this.noiseShare = noiseShares(survey, pass);
  }

  /** MJD of the first and of the last integration of steps, ends included. */
  timeRange(firstStep: number, lastStep: number): [number, number] {
    const { times } = this.survey;
    const { perStep } = this.pass.combined;
    return [times[firstStep * perStep]!, times[Math.min(times.length, (lastStep + 1) * perStep) - 1]!];
  }

  /** Call for each cell of a rectangle's integrations that the subset means. */
  private eachCell(
    { firstStep, lastStep }: Rectangle,
    { baselines }: Subset,
    visit: (cell: number) => void,
  ): void {
    const { tracks } = this.survey;
    for (let k = this.firstOfStep[firstStep]!; k < this.firstOfStep[lastStep + 1]!; k++) {
      const cell = this.cells[k]!;
      if (baselines === null || baselines[tracks.baseline[cell]!] === 1) visit(cell);
    }
  }

  /**
   * Count a rectangle's samples into `counts[key(baseline, step, column, polarization)]`.
   *
   * @param key -1: not to be counted
   */
  count(
    rectangle: Rectangle,
    subset: Subset,
    counts: readonly Counts[],
    key: (baseline: number, step: number, column: number, polarization: number) => number,
  ): void {
    const { marks } = this.pass;
    if (marks === null) return;
    const { polarizations } = this;
    const { tracks } = this.survey;
    this.eachCell(rectangle, subset, (cell) => {
      const baseline = tracks.baseline[cell]!;
      const step = this.stepOfCell[cell]!;
      for (let column = rectangle.low; column <= rectangle.high; column++) {
        for (let p = 0; p < polarizations; p++) {
          if (subset.polarizations !== null && subset.polarizations[p] === 0) continue;
          const sample = column * polarizations + p;
          if (!marks.usable.has(cell, sample)) continue;
          const to = key(baseline, step, column, p);
          if (to < 0) continue;
          const into = counts[to]!;
          const elevated = marks.elevated.has(cell, sample);
          into.usable += 1;
          if (elevated) into.elevated += 1;
          into.noise += Math.log(elevated ? this.noiseShare[baseline]! : 1 - this.noiseShare[baseline]!);
          if (marks.outlying.has(cell, sample)) into.outlying += 1;
          if (marks.bright.has(cell, sample)) into.bright += 1;
        }
      }
    });
  }

  /** A rectangle's counts in one. */
  total(rectangle: Rectangle, subset: Subset): Counts {
    const counts = noCounts();
    this.count(rectangle, subset, [counts], () => 0);
    return counts;
  }

  /** Take a rectangle's samples out of everything that is still to be looked at. */
  clear(rectangle: Rectangle, subset: Subset): void {
    const { marks } = this.pass;
    if (marks === null) return;
    this.eachCell(rectangle, subset, (cell) => {
      for (let column = rectangle.low; column <= rectangle.high; column++) {
        for (let p = 0; p < this.polarizations; p++) {
          if (subset.polarizations !== null && subset.polarizations[p] === 0) continue;
          this.clearSample(cell, column * this.polarizations + p);
        }
      }
    });
  }

  /** Take samples out that are explained already. */
  explain(selections: readonly Selection[]): void {
    if (selections.length === 0 || this.pass.marks === null) return;
    const { dataset, tracks, baselines } = this.survey;
    const matcher = compileSelections(dataset, selections);
    const row = newBlock(1, dataset.shape, "rows");
    for (let cell = 0; cell < tracks.cells; cell++) {
      const { antenna1, antenna2 } = baselines[tracks.baseline[cell]!]!;
      row.time[0] = tracks.time[cell]!;
      row.antenna1[0] = antenna1;
      row.antenna2[0] = antenna2;
      row.field[0] = tracks.field[cell]!;
      const found = matcher.matchRow(row, 0);
      for (let i = 0; i < found; i++) {
        const runs = matcher.runs[matcher.matched[i]!]!;
        for (let r = 0; r < runs.length; r += 2) {
          for (let sample = runs[r]!; sample < runs[r + 1]!; sample++) this.clearSample(cell, sample);
        }
      }
    }
  }

  private clearSample(cell: number, sample: number): void {
    const marks = this.pass.marks!;
    marks.usable.clear(cell, sample);
    marks.elevated.clear(cell, sample);
    marks.outlying.clear(cell, sample);
    marks.bright.clear(cell, sample);
  }
}

function noiseShares({ tracks, baselines }: Survey, { marks }: SecondPass): Float64Array {
  const shares = new Float64Array(baselines.length).fill(ELEVATED_SHARE);
  if (marks === null) return shares;
  const { words } = marks.usable;
  for (let b = 0; b < baselines.length; b++) {
    let usable = 0;
    let elevated = 0;
    for (let w = tracks.firstCell[b]! * words; w < tracks.firstCell[b + 1]! * words; w++) {
      usable += ones(marks.usable.bits[w]!);
      elevated += ones(marks.elevated.bits[w]!);
    }
    if (usable > 0) shares[b] = Math.min(ELEVATED_SHARE, Math.max(LEAST_NOISE_SHARE, elevated / usable));
  }
  return shares;
}
