/** Where scores added over baselines stand out: masks of integrations by channels. */

import type { Band } from "../pass/bands.ts";
import { type CombinedScores, LENGTH_GROUPS } from "../pass/combined.ts";
import type { SecondPass } from "../pass/second-pass.ts";
import { medianInPlace, selectKth } from "../statistics/order.ts";
import { SumThresholdRoom, sumThreshold } from "../statistics/sum-threshold.ts";

const LONGEST = 64;
const FIRST = 6;
const RATIO = 1.5;
/** Mean score of a sample below which the background is doubted rather than the data. */
const LEAST_MEAN = 0.3;
/** The same of most of a band at once, which a background that does not fit causes more easily. */
const LEAST_ROW_MEAN = 1.5;
/** A channel's mean over all time must stand this many sigmas out of the band's. */
const LEAST_CHANNEL = 8;
/** Of a row's channels this share are taken to be quiet; normal deviates below it, in sigmas. */
const QUIET_QUANTILE = 0.3;
const QUIET_DEVIATE = -0.5244;
/** Parts of the time in which a channel must stand out, all but one, to do so at all times. */
const PARTS = 8;
/** Share of the integrations at which a channel is hit all the time. */
export const PERSISTENT_SHARE = 0.75;

export interface Found {
  /** (steps x columns) 1: stands out; 0 else */
  readonly mask: Uint8Array;
  /** (columns) 1: stands out at all times */
  readonly persistent: Uint8Array;
}

export class Finder {
  private readonly combined: CombinedScores;
  private readonly sampled: CombinedScores | null;
  private readonly isWhole: boolean;
  private readonly room = new SumThresholdRoom();

  constructor({ combined, sampled, choice }: Pick<SecondPass, "combined" | "sampled" | "choice">) {
    this.combined = combined;
    this.isWhole = choice.isWhole;
    this.sampled = sampled;
  }

  /** What stands out in a band: on all baselines or on the shorter ones, in all products or in one. */
  find(band: Band): Found {
    const { combined } = this;
    const { steps, polarizations } = combined;
    const { columns } = band;
    const mask = new Uint8Array(steps * columns);
    const persistent = new Uint8Array(columns);
    const scores = new Float32Array(steps * columns);
    const marks = new Uint8Array(steps * columns);
    const counts = new Float32Array(steps * columns);
    const products: (number | null)[] = polarizations === 1 ? [null] : [null, ...Array(polarizations).keys()];
    for (let groups = LENGTH_GROUPS; groups >= 1; groups = groups >> 1) {
      for (const product of products) {
        combined.fill(groups, band.first, columns, product, scores, marks, counts);
        this.level(scores, marks, counts, steps, columns);
        // Of a part of the time nothing can be said to be always there: that is told by the sample of all of it.
        if (this.isWhole) markChannels(scores, marks, counts, steps, columns, persistent);
        else if (this.sampled !== null) this.markSampled(this.sampled, groups, band, product, persistent);
        sumThreshold(
          scores,
          marks,
          steps,
          columns,
          { first: FIRST, ratio: RATIO, longestTime: LONGEST, longestFrequency: Math.max(1, columns >> 1) },
          this.room,
        );
        for (let i = 0; i < mask.length; i++) if (marks[i] === 1) mask[i] = 1;
      }
    }
    for (let c = 0; c < columns; c++) {
      let hit = 0;
      for (let step = 0; step < steps; step++) hit += mask[step * columns + c]!;
      if (steps > 1 && hit >= PERSISTENT_SHARE * steps) persistent[c] = 1;
    }
    return { mask, persistent };
  }

  /** Take out what most of the band has in common, unless it is too strong to be a background that does not fit. */
  private level(
    scores: Float32Array,
    marks: Uint8Array,
    counts: Float32Array,
    steps: number,
    columns: number,
  ): void {
    const work = new Float64Array(columns);
    for (let step = 0; step < steps; step++) {
      const at = step * columns;
      let count = 0;
      let samples = 0;
      for (let i = at; i < at + columns; i++) {
        if (marks[i] === 2) continue;
        work[count++] = scores[i]!;
        samples += counts[i]!;
      }
      if (count < 2) continue;
      // A quantile from below, since interference may well fill half of the band; put back to where noise has it.
      const common = selectKth(work, count, Math.floor(QUIET_QUANTILE * (count - 1))) - QUIET_DEVIATE;
      if (common <= 0 || common > LEAST_ROW_MEAN * Math.sqrt(samples / count)) continue;
      for (let i = at; i < at + columns; i++) scores[i]! -= common;
    }
  }

  /** What is there all the time, by what was looked at of each baseline at some times. */
  private markSampled(
    sampled: CombinedScores,
    groups: number,
    band: Band,
    product: number | null,
    persistent: Uint8Array,
  ): void {
    const { steps } = sampled;
    const { columns } = band;
    const scores = new Float32Array(steps * columns);
    const marks = new Uint8Array(steps * columns);
    const counts = new Float32Array(steps * columns);
    sampled.fill(groups, band.first, columns, product, scores, marks, counts);
    this.level(scores, marks, counts, steps, columns);
    markChannels(scores, marks, counts, steps, columns, persistent);
  }
}

function markChannels(
  scores: Float32Array,
  marks: Uint8Array,
  counts: Float32Array,
  steps: number,
  columns: number,
  persistent: Uint8Array,
): void {
  const sums = new Float64Array(columns);
  const means = new Float64Array(columns);
  const work = new Float64Array(columns);
  let known = 0;
  for (let c = 0; c < columns; c++) {
    let sum = 0;
    let weighted = 0;
    let samples = 0;
    let n = 0;
    for (let i = c; i < steps * columns; i += columns) {
      if (marks[i] === 2) continue;
      sum += scores[i]!;
      weighted += scores[i]! * Math.sqrt(counts[i]!);
      samples += counts[i]!;
      n += 1;
    }
    sums[c] = n === 0 ? Number.NaN : sum / Math.sqrt(n);
    means[c] = weighted / samples;
    if (n > 0) work[known++] = sums[c]!;
  }
  if (known < 4) return;
  const middle = medianInPlace(work, known);
  for (let k = 0; k < known; k++) work[k] = Math.abs(work[k]! - middle);
  const spread = Math.max(1, 1.4826 * medianInPlace(work, known));
  for (let c = 0; c < columns; c++) {
    const clear = sums[c]! - middle > LEAST_CHANNEL * spread && means[c]! > LEAST_MEAN;
    if (clear && lasts(scores, marks, counts, steps, columns, c)) persistent[c] = 1;
  }
}

/** Whether a channel stands out in all parts of the time but one. */
function lasts(
  scores: Float32Array,
  marks: Uint8Array,
  counts: Float32Array,
  steps: number,
  columns: number,
  column: number,
): boolean {
  const parts = Math.min(PARTS, steps);
  let seen = 0;
  let high = 0;
  for (let part = 0; part < parts; part++) {
    let weighted = 0;
    let samples = 0;
    for (
      let step = Math.floor((part * steps) / parts);
      step < Math.floor(((part + 1) * steps) / parts);
      step++
    ) {
      const i = step * columns + column;
      if (marks[i] === 2) continue;
      weighted += scores[i]! * Math.sqrt(counts[i]!);
      samples += counts[i]!;
    }
    if (samples === 0) continue;
    seen += 1;
    if (weighted > LEAST_MEAN * samples) high += 1;
  }
  return high >= Math.max(1, seen - 1);
}
