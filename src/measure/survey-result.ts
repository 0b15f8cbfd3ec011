/**
 * What the surveying pass leaves behind: everything that later stages compute from without reading again.
 * Baselines are held with the lower antenna number first; a row stored the other way round is conjugated and its
 * u, v, w negated. Autocorrelations are counted and otherwise left out.
 */
import type { Dataset } from "../dataset/dataset.ts";
import type { OtherRows } from "./other-spacings.ts";
import type { Screened } from "./screen/screen.ts";
import type { Measures } from "./table.ts";

/** A baseline met in the data; index in `Survey.baselines` is its number everywhere below. */
export interface Baseline {
  readonly antenna1: number;
  readonly antenna2: number;
}

/**
 * Channel-averaged visibilities: one cell a baseline and integration (or time bin, where integrations are too
 * many to keep), sorted by baseline, then time. Arrays of products are (cells x subbands x polarizations),
 * polarization fastest.
 */
export interface Tracks {
  readonly cells: number;
  /** 0: a cell is one integration; otherwise the width of the time bins, seconds */
  readonly binSeconds: number;
  /** (cells) index into Survey.baselines */
  readonly baseline: Int32Array;
  /** (baselines + 1) first cell of each baseline */
  readonly firstCell: Int32Array;
  /** (cells) MJD (UTC, days) */
  readonly time: Float64Array;
  /** (cells) seconds of light travel */
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly w: Float64Array;
  /** (cells) Field.id, index of setup, scan number from 0, sub-array */
  readonly field: Int32Array;
  readonly setup: Int32Array;
  readonly scan: Int32Array;
  readonly subarray: Int32Array;
  /** (cells) seconds, NaN unknown */
  readonly integration: Float32Array;
  /** weighted mean over usable channels, NaN where none is usable */
  readonly real: Float32Array;
  readonly imag: Float32Array;
  /** mean amplitude over usable channels (not debiased), NaN where none */
  readonly amplitude: Float32Array;
  /** sum of weights of usable samples */
  readonly weight: Float32Array;
  /** sum over channels of V(c+1) V*(c) of usable neighbours: its argument is the phase slope a channel */
  readonly slopeReal: Float32Array;
  readonly slopeImag: Float32Array;
  /** samples by what they are; the four add up to the samples of the cell */
  readonly usable: Uint32Array;
  readonly flagged: Uint32Array;
  readonly bad: Uint32Array;
  /** exact 0 + 0i with a positive weight: not a measurement */
  readonly zero: Uint32Array;
}

/**
 * Robust levels of the samples, (baselines x subbands x channels x polarizations), polarization fastest.
 * Channels may share one value where memory would not hold them all.
 */
export interface Levels {
  /** median amplitude, dataset unit; NaN where nothing is usable */
  readonly median: Float32Array;
  /** rms of the real (or imaginary) part of one sample by adjacent differences; NaN where unknown */
  readonly sigma: Float32Array;
  /** usable samples */
  readonly count: Uint32Array;
}

export interface Survey {
  readonly dataset: Dataset;
  /** sorted by antenna1, then antenna2 */
  readonly baselines: readonly Baseline[];
  /** antenna numbers with a usable cross-correlation sample, ascending */
  readonly antennasWithData: readonly number[];
  readonly tracks: Tracks;
  readonly levels: Levels;
  /** distinct integration centres, MJD ascending */
  readonly times: Float64Array;
  /** typical (median) integration time, seconds: from INTTIM, else from the spacing of times */
  readonly integration: number;
  /** [start, end] of each scan, MJD, by index; a scan ends at a change of field or a gap of 5 integrations and 60 s */
  readonly scans: readonly { readonly start: number; readonly end: number; readonly field: number }[];
  readonly totals: Totals;
  /** where there are too many baselines for all to be above: the rest of them; absent: there is none */
  readonly others?: Others;
  /** where the samples deserve a second look; without it everywhere */
  readonly screen?: Screened;
  readonly measures: Measures;
}

/**
 * Baselines that are not among `Survey.baselines`, which are an even choice of all then: whatever is computed from
 * tracks and levels is of the choice, whatever reads the samples is of all.
 */
export interface Others {
  /** how many there are */
  readonly baselines: number;
  /** by field and setup */
  readonly rows: readonly OtherRows[];
}

/** Counts over all cross-correlations, except `autocorrelationRows`. */
export interface Totals {
  readonly rows: number;
  readonly autocorrelationRows: number;
  readonly samples: number;
  readonly usable: number;
  readonly flagged: number;
  readonly bad: number;
  readonly zero: number;
  /** rows that repeat an earlier (time, baseline, field, setup, sub-array) */
  readonly duplicateRows: number;
  /** rows earlier than the row before them, beyond a float32 step of the day fraction, 5.2 ms */
  readonly outOfOrderRows: number;
  readonly badTimeRows: number;
  readonly badUvwRows: number;
}

/** A survey before its measures. */
export type BareSurvey = Omit<Survey, "measures">;

/** How many baselines there are in the data. */
export function baselinesMet({ baselines, others }: Pick<Survey, "baselines" | "others">): number {
  return baselines.length + (others?.baselines ?? 0);
}
