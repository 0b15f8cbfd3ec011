/**
 * The cells of the tracks as charts need them: what each is (flagged already, taken by a suggested flag, kept), and
 * how much of each antenna's and channel's samples the suggested flags would take.
 */

import type { SampleBlock } from "../../dataset/dataset.ts";
import { compileSelections } from "../../dataset/flagged-view.ts";
import type { Survey } from "../../measure/survey-result.ts";
import type { Check } from "../report.ts";

export const KEPT = 0;
export const SUGGESTED = 1;
export const FLAGGED = 2;

/** Samples by what they are and what would become of them. */
export interface Fate {
  /** of them usable and not touched */
  kept: number;
  /** usable and in a suggested flag */
  suggested: number;
  flagged: number;
  /** not finite, or exactly zero */
  bad: number;
}

export interface Cells {
  /** (cells) KEPT, SUGGESTED (most of its usable samples) or FLAGGED (none usable) */
  readonly fate: Uint8Array;
  /** of all polarizations; (polarizations) false where none of its samples is usable: absent, and counted nowhere here */
  readonly present: readonly boolean[];
  /** by antenna number */
  readonly antennas: ReadonlyMap<number, Fate>;
  /** (subbands x channels) share of all samples of the channel that a suggested flag covers, 0..1 */
  readonly channelCover: Float64Array;
}

/** What a set of suggested flags takes of a row's samples; many rows share a set. */
interface Cover {
  /** (subbands x polarizations) share of the channels taken */
  readonly products: Float64Array;
  /** (subbands x channels) share of the polarizations taken */
  readonly channels: Float64Array;
  rows: number;
}

export function classifyCells(check: Check): Cells {
  const { survey, dataset, flags } = check;
  const { tracks } = survey;
  const { polarizations } = dataset.shape;
  const products = dataset.shape.subbands * polarizations;
  const present = presentPolarizations(check);
  const matcher = compileSelections(dataset, flags);
  const block = blockOf(survey);
  const covers = new Map<string, Cover>();
  const fate = new Uint8Array(tracks.cells);
  const antennas = new Map<number, Fate>();
  const fateOf = (antenna: number) => {
    const found = antennas.get(antenna) ?? { kept: 0, suggested: 0, flagged: 0, bad: 0 };
    antennas.set(antenna, found);
    return found;
  };
  for (let cell = 0; cell < tracks.cells; cell++) {
    const count = matcher.matchRow(block, cell);
    const set = matcher.matched.subarray(0, count);
    const key = set.join(",");
    let cover = covers.get(key);
    if (cover === undefined) {
      cover = coverOf(check, set, matcher.runs);
      covers.set(key, cover);
    }
    cover.rows += 1;
    let [usable, taken, flagged, bad] = [0, 0, 0, 0];
    for (let product = 0; product < products; product++) {
      if (!present[product % polarizations]) continue;
      const at = cell * products + product;
      usable += tracks.usable[at]!;
      taken += tracks.usable[at]! * cover.products[product]!;
      flagged += tracks.flagged[at]!;
      bad += tracks.bad[at]! + tracks.zero[at]!;
    }
    fate[cell] = usable === 0 ? FLAGGED : taken > usable / 2 ? SUGGESTED : KEPT;
    const { antenna1, antenna2 } = survey.baselines[tracks.baseline[cell]!]!;
    for (const antenna of [antenna1, antenna2]) {
      const sums = fateOf(antenna);
      sums.kept += usable - taken;
      sums.suggested += taken;
      sums.flagged += flagged;
      sums.bad += bad;
    }
  }
  return { fate, present, antennas, channelCover: channelCoverOf(check, covers) };
}

/** Products that a file has room for and never fills are absent, not lost; where all are so, none is. */
function presentPolarizations(check: Check): boolean[] {
  const { tracks } = check.survey;
  const { polarizations } = check.dataset.shape;
  const present = new Array<boolean>(polarizations).fill(false);
  for (let at = 0; at < tracks.usable.length; at++) {
    if (tracks.usable[at]! > 0) present[at % polarizations] = true;
  }
  return present.includes(true) ? present : present.fill(true);
}

/** The row columns of the cells as a block, for the matcher. */
function blockOf(survey: Survey): SampleBlock {
  const { tracks, baselines } = survey;
  const antenna1 = Int32Array.from(tracks.baseline, (baseline) => baselines[baseline]!.antenna1);
  const antenna2 = Int32Array.from(tracks.baseline, (baseline) => baselines[baseline]!.antenna2);
  const none = new Float32Array(0);
  const { time, u, v, w, subarray, field, setup, integration } = tracks;
  const samples = { real: none, imag: none, weight: none };
  return {
    firstRow: 0,
    rows: tracks.cells,
    time,
    u,
    v,
    w,
    antenna1,
    antenna2,
    subarray,
    field,
    setup,
    integration,
    ...samples,
  };
}

function coverOf(check: Check, set: Int32Array, runs: readonly Int32Array[]): Cover {
  const { subbands, channels, polarizations } = check.dataset.shape;
  const taken = new Uint8Array(subbands * channels * polarizations);
  for (const flag of set) {
    const bounds = runs[flag]!;
    for (let b = 0; b < bounds.length; b += 2) taken.fill(1, bounds[b]!, bounds[b + 1]!);
  }
  const cover = {
    products: new Float64Array(subbands * polarizations),
    channels: new Float64Array(subbands * channels),
    rows: 0,
  };
  if (set.length === 0) return cover;
  for (let i = 0; i < taken.length; i++) {
    if (taken[i] === 0) continue;
    const polarization = i % polarizations;
    const channel = Math.floor(i / polarizations);
    cover.products[Math.floor(channel / channels) * polarizations + polarization]! += 1 / channels;
    cover.channels[channel]! += 1 / polarizations;
  }
  return cover;
}

function channelCoverOf(check: Check, covers: ReadonlyMap<string, Cover>): Float64Array {
  const { subbands, channels } = check.dataset.shape;
  const cells = check.survey.tracks.cells;
  const share = new Float64Array(subbands * channels);
  for (const cover of covers.values()) {
    for (let channel = 0; channel < share.length; channel++) {
      share[channel]! += (cover.channels[channel]! * cover.rows) / Math.max(1, cells);
    }
  }
  return share;
}

/** Every n-th cell, so that at most `most` are left; the same ones every time. */
export function someCells(survey: Survey, most: number): Int32Array {
  const { cells } = survey.tracks;
  const step = Math.max(1, Math.ceil(cells / most));
  return Int32Array.from({ length: Math.ceil(cells / step) }, (_, i) => i * step);
}
