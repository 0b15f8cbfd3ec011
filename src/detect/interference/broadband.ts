/**
 * Bursts that fill a band: noise of the integrations, by baseline against its own, raised on most baselines at once.
 * What a single antenna does, or a background that some baselines do not fit, leaves the median over baselines alone.
 */

import type { Band } from "../pass/bands.ts";
import { LENGTH_GROUPS } from "../pass/combined.ts";
import { medianInPlace, selectKth } from "../statistics/order.ts";
import type { Grid } from "./grid.ts";

/** Noise power over the usual from which on an integration is hit. */
const LEAST_RATIO = 1.5;
/** The same in sigmas of how the ratio scatters from one integration to the next. */
const LEAST_SIGNIFICANCE = 8;
/** Baselines and products that a median needs. */
const FEWEST = 6;
/** Channels are unlike when the fainter ones have less than this share of the brighter ones' score, this surely. */
const UNLIKE_SHARE = 0.35;
const UNLIKE_SIGMAS = 8;
/** Of all integrations at most so many are a burst. */
const MOST_SHARE = 0.3;

export interface BroadbandBurst {
  readonly firstStep: number;
  readonly lastStep: number;
  /** noise power over the usual */
  readonly ratio: number;
  readonly significance: number;
}

export function broadbandBursts(grid: Grid, band: Band): BroadbandBurst[] {
  const { subband } = band;
  if (subband === null) return [];
  const ratios = ratiosOf(grid, subband);
  const known = ratios.filter((ratio) => !Number.isNaN(ratio));
  if (known.length < FEWEST) return [];
  const middle = medianInPlace(known.slice());
  const scatter = 1.4826 * medianInPlace(known.map((ratio) => Math.abs(ratio - middle)));
  const limit = Math.max(LEAST_RATIO, middle + LEAST_SIGNIFICANCE * scatter);
  const bursts: BroadbandBurst[] = [];
  let hit = 0;
  for (let step = 0; step < grid.steps; step++) {
    if (!(ratios[step]! > limit)) continue;
    let last = step;
    let best = ratios[step]!;
    while (last + 1 < grid.steps && ratios[last + 1]! > limit) best = Math.max(best, ratios[++last]!);
    const significance = Math.min(1000, (best - middle) / Math.max(scatter, 1e-3));
    bursts.push({ firstStep: step, lastStep: last, ratio: best, significance });
    hit += last - step + 1;
    step = last;
  }
  return hit <= MOST_SHARE * known.length ? bursts.filter((burst) => fillsBand(grid, band, burst)) : [];
}

/** Whether the channels of a band stand out alike, not some and others not. */
function fillsBand(grid: Grid, band: Band, { firstStep, lastStep }: BroadbandBurst): boolean {
  const { combined } = grid.pass;
  const size = grid.steps * band.columns;
  const scores = new Float32Array(size);
  const marks = new Uint8Array(size);
  const samples = new Float32Array(size);
  combined.fill(LENGTH_GROUPS, band.first, band.columns, null, scores, marks, samples);
  const means: number[] = [];
  let most = 0;
  for (let c = 0; c < band.columns; c++) {
    let sum = 0;
    let count = 0;
    for (let i = firstStep * band.columns + c; i < (lastStep + 1) * band.columns; i += band.columns) {
      if (marks[i] === 2) continue;
      sum += scores[i]! * Math.sqrt(samples[i]!);
      count += samples[i]!;
    }
    if (count > 0) means.push(sum / count);
    most = Math.max(most, count);
  }
  if (means.length === 0) return false;
  const work = Float64Array.from(means);
  const low = selectKth(work, work.length, Math.floor(0.1 * (work.length - 1)));
  const high = selectKth(work, work.length, Math.ceil(0.9 * (work.length - 1)));
  const differ = (high - low) * Math.sqrt(most) > UNLIKE_SIGMAS;
  return !(differ && low < UNLIKE_SHARE * high);
}

/** (steps) median over baselines and products of the noise over what the baseline has usually; NaN unknown. */
function ratiosOf(grid: Grid, subband: number): Float64Array {
  const { survey, pass, polarizations } = grid;
  const { tracks, baselines, dataset } = survey;
  const { subbands } = dataset.shape;
  const { noise } = pass.clean;
  const usual = new Float64Array(baselines.length * polarizations).fill(Number.NaN);
  for (let b = 0; b < baselines.length; b++) {
    const [first, end] = [tracks.firstCell[b]!, tracks.firstCell[b + 1]!];
    const work = new Float64Array(end - first);
    for (let p = 0; p < polarizations; p++) {
      let count = 0;
      for (let cell = first; cell < end; cell++) {
        const value = noise[(cell * subbands + subband) * polarizations + p]!;
        if (value > 0 && value < Number.POSITIVE_INFINITY) work[count++] = value;
      }
      usual[b * polarizations + p] = medianInPlace(work, count);
    }
  }
  let most = 0;
  for (let step = 0; step < grid.steps; step++) {
    most = Math.max(most, grid.firstOfStep[step + 1]! - grid.firstOfStep[step]!);
  }
  const work = new Float64Array(most * polarizations);
  return Float64Array.from({ length: grid.steps }, (_, step) => {
    let count = 0;
    for (let k = grid.firstOfStep[step]!; k < grid.firstOfStep[step + 1]!; k++) {
      const cell = grid.cells[k]!;
      for (let p = 0; p < polarizations; p++) {
        const ratio =
          noise[(cell * subbands + subband) * polarizations + p]! /
          usual[tracks.baseline[cell]! * polarizations + p]!;
        // Noise beyond what can be told counts as much.
        if (ratio >= 0) work[count++] = Math.min(ratio, 1e6);
      }
    }
    return count < FEWEST ? Number.NaN : medianInPlace(work, count);
  });
}
