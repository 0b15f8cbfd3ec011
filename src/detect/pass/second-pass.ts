/**
 * The second pass over the samples: each baseline's planes against their own background and noise. It leaves bits of
 * what stands out, scores added over baselines, and tracks without what stands out.
 */

import type { Shape } from "../../dataset/dataset.ts";
import { EARTH_ROTATION_RATE } from "../../geometry/sidereal.ts";
import type { Survey } from "../../measure/survey-result.ts";
import { SECONDS_PER_DAY, SPEED_OF_LIGHT } from "../../util/constants.ts";
import { median } from "../../util/statistics.ts";
import { fillScores } from "../statistics/normal.ts";
import { SumThresholdRoom, type SumThresholdSettings, sumThreshold } from "../statistics/sum-threshold.ts";
import { Background } from "./background.ts";
import { type Band, bandsOf } from "./bands.ts";
import { SampleBits } from "./bits.ts";
import { CleanTracks } from "./clean-tracks.ts";
import { CombinedScores } from "./combined.ts";
import { ChannelKurtosis } from "./kurtosis.ts";
import { Normaliser } from "./normalise.ts";
import { Plane } from "./plane.ts";
import { type RowRun, type Tile, tilesOf } from "./tiles.ts";
import { fillScoresInTime } from "./time-axis.ts";

/** A single sample this many sigmas up is outlying: in 10^9 of noise there is one. */
export const SINGLE_SCORE = 6;
/** Offringa et al. 2010 */
export const RATIO = 1.5;
/** Longer runs are for the sums over baselines: one baseline's background is not that well known. */
const ON_BASELINE: SumThresholdSettings = {
  first: SINGLE_SCORE,
  ratio: RATIO,
  longestTime: 16,
  longestFrequency: 16,
};
/** A sample above this is elevated: of noise, 5 in 100 are. */
export const ELEVATED_SCORE = 1.6448536269514722;
export const ELEVATED_SHARE = 0.05;
/** Samples for which bits are kept: four bitsets of 2^28 samples are 128 MB. */
const MOST_BITS = 2 ** 28;
/** Sources are in sight within this many beamwidths of the pointing centre, and at most this far (radians). */
const BEAMWIDTHS_IN_SIGHT = 2;
const DEFAULT_SIGHT = 0.035;

export interface SampleMarks {
  readonly usable: SampleBits;
  readonly elevated: SampleBits;
  /** in a run that SumThreshold found on its baseline alone */
  readonly outlying: SampleBits;
  /** above SINGLE_SCORE by itself */
  readonly bright: SampleBits;
}

export interface SecondPass {
  readonly bands: readonly Band[];
  /** null where the dataset is too large to keep a bit a sample */
  readonly marks: SampleMarks | null;
  readonly combined: CombinedScores;
  readonly clean: CleanTracks;
  readonly kurtosis: ChannelKurtosis;
}

export async function secondPass(
  survey: Survey,
  onProgress?: (rowsDone: number, rows: number) => void,
): Promise<SecondPass> {
  const scan = new SampleScan(survey);
  for await (const tile of tilesOf(survey, (done) => onProgress?.(done, survey.dataset.rows))) {
    for (const run of tile.runs()) scan.add(tile, run);
  }
  return scan.finish();
}

class SampleScan {
  private readonly survey: Survey;
  private readonly bands: readonly Band[];
  private readonly marks: SampleMarks | null;
  private readonly combined: CombinedScores;
  private readonly clean: CleanTracks;
  private readonly kurtosis: ChannelKurtosis;
  /** by first sample: the samples of a row that a band and polarization take */
  private readonly masks: readonly Uint32Array[];
  private readonly plane = new Plane();
  private readonly background = new Background();
  private readonly normaliser = new Normaliser();
  private readonly room = new SumThresholdRoom();
  /** (baselines x bands x polarizations) 2 sigma^2 by the survey */
  private readonly noise: Float64Array;
  /** radians a channel and second of baseline that a source in sight can turn */
  private readonly steepness: Float64Array;
  /** radians a second, and second of baseline, likewise */
  private readonly swiftness: Float64Array;

  constructor(survey: Survey) {
    this.survey = survey;
    const { dataset, tracks } = survey;
    const { subbands, channels, polarizations } = dataset.shape;
    const rowSamples = subbands * channels * polarizations;
    this.bands = bandsOf(dataset.shape);
    const bits = () => new SampleBits(tracks.cells, rowSamples);
    this.marks =
      tracks.cells * rowSamples > MOST_BITS
        ? null
        : { usable: bits(), elevated: bits(), outlying: bits(), bright: bits() };
    this.masks = rowMasks(this.bands, dataset.shape);
    this.combined = new CombinedScores(survey);
    this.clean = new CleanTracks(survey);
    this.kurtosis = new ChannelKurtosis(subbands * channels, polarizations);
    this.noise = surveyedNoise(survey, this.bands);
    const sight = dataset.setups.map((_, s) => angleInSight(survey, s));
    this.steepness = Float64Array.from(
      dataset.setups,
      ({ channelWidths }, s) => 2 * Math.PI * median(channelWidths) * sight[s]!,
    );
    this.swiftness = Float64Array.from(
      dataset.setups,
      ({ frequencies }, s) => 2 * Math.PI * median(frequencies) * sight[s]! * EARTH_ROTATION_RATE,
    );
  }

  add(tile: Tile, run: RowRun): void {
    const { polarizations } = this.survey.dataset.shape;
    for (const [b, band] of this.bands.entries()) {
      for (let p = 0; p < polarizations; p++) this.addPlane(tile, run, b, band, p);
    }
    if (this.bands.length === 0) this.addShort(tile, run);
  }

  private addPlane(tile: Tile, run: RowRun, b: number, band: Band, polarization: number): void {
    const { plane, background, normaliser, survey } = this;
    const { polarizations } = survey.dataset.shape;
    plane.take(tile, run, band, polarization, polarizations);
    const noise = this.noise[(run.baseline * this.bands.length + b) * polarizations + polarization]!;
    const { tracks } = survey;
    const steepness = this.steepness[run.setup]!;
    const length = (row: number) => {
      const cell = tile.cell[tile.order[run.first + row]!]!;
      return Math.hypot(tracks.u[cell]!, tracks.v[cell]!);
    };
    const [first, last] = [
      tile.cell[tile.order[run.first]!]!,
      tile.cell[tile.order[run.first + run.rows - 1]!]!,
    ];
    const spacing =
      ((tracks.time[last]! - tracks.time[first]!) * SECONDS_PER_DAY) / Math.max(1, run.rows - 1);
    background.fit(
      plane,
      noise,
      (row) => steepness * length(row),
      this.swiftness[run.setup]! * length(0) * (spacing || 0),
    );
    this.kurtosis.add(plane, band, polarization);
    const typical = normaliser.apply(plane, background.bandpass);
    const size = plane.rows * plane.columns;
    fillScores(plane.power, size);
    sumThreshold(plane.power, plane.marks, plane.rows, plane.columns, ON_BASELINE, this.room);
    this.keep(tile, run, band, polarization);
    this.clean.add(tile, run, band, polarization, plane, typical, normaliser.rowNoise);
  }

  /** Too few channels to look along frequency: each product against its neighbours in time. */
  private addShort(tile: Tile, run: RowRun): void {
    const { plane, survey } = this;
    const { subbands, channels, polarizations } = survey.dataset.shape;
    const band: Band = { first: 0, columns: subbands * channels, subband: null };
    for (let p = 0; p < polarizations; p++) {
      plane.take(tile, run, band, p, polarizations);
      fillScoresInTime(plane, (row) => survey.tracks.scan[tile.cell[tile.order[run.first + row]!]!]!);
      for (let i = 0; i < plane.rows * plane.columns; i++) {
        if (plane.marks[i] === 0 && plane.power[i]! > SINGLE_SCORE) plane.marks[i] = 1;
      }
      this.keep(tile, run, band, p);
      this.clean.add(tile, run, band, p, plane, Number.NaN, null);
    }
  }

  private keep(tile: Tile, run: RowRun, band: Band, polarization: number): void {
    const { plane, marks, combined, survey } = this;
    const { columns, power } = plane;
    const { polarizations } = survey.dataset.shape;
    const mask = this.masks[band.first * polarizations + polarization]!;
    let timeIndex = 0;
    for (let row = 0; row < run.rows; row++) {
      const r = tile.order[run.first + row]!;
      timeIndex = indexOfTime(survey.times, tile.time[r]!, timeIndex);
      const at = row * columns;
      combined.add(run.baseline, timeIndex, band.first, polarization, power, plane.marks, at, columns);
      if (marks === null) continue;
      const cell = tile.cell[r]!;
      const whole = plane.usable[row] === columns;
      if (whole) marks.usable.setAll(cell, mask);
      let sample = band.first * polarizations + polarization;
      for (let i = at; i < at + columns; i++, sample += polarizations) {
        const mark = plane.marks[i]!;
        const score = power[i]!;
        if (mark === 0 && whole && score <= ELEVATED_SCORE) continue;
        if (mark === 2) continue;
        if (!whole) marks.usable.set(cell, sample);
        if (mark === 1) marks.outlying.set(cell, sample);
        if (score > ELEVATED_SCORE) marks.elevated.set(cell, sample);
        if (score > SINGLE_SCORE) marks.bright.set(cell, sample);
      }
    }
  }

  finish(): SecondPass {
    this.clean.finish();
    const { bands, marks, combined, clean, kurtosis } = this;
    return { bands, marks, combined, clean, kurtosis };
  }
}

function rowMasks(bands: readonly Band[], { subbands, channels, polarizations }: Shape): Uint32Array[] {
  const masks: Uint32Array[] = [];
  const whole: Band = { first: 0, columns: subbands * channels, subband: null };
  for (const { first, columns } of bands.length > 0 ? bands : [whole]) {
    for (let p = 0; p < polarizations; p++) {
      const row = new SampleBits(1, subbands * channels * polarizations);
      for (let c = first; c < first + columns; c++) row.set(0, c * polarizations + p);
      masks[first * polarizations + p] = row.bits;
    }
  }
  return masks;
}

/** Index of the integration that a time belongs to: the last that does not begin after it. */
export function indexOfTime(times: Float64Array, time: number, near = 0): number {
  // Rows come in order of time: the next integration is the usual answer.
  for (let i = near; i < Math.min(near + 2, times.length); i++) {
    if (times[i]! <= time && (i + 1 === times.length || times[i + 1]! > time)) return i;
  }
  let low = 0;
  let high = times.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (times[middle]! <= time) low = middle + 1;
    else high = middle;
  }
  return Math.max(0, low - 1);
}

/** The survey's noise of each baseline, band and polarization, as 2 sigma^2: its median over the channels. */
function surveyedNoise(survey: Survey, bands: readonly Band[]): Float64Array {
  const { subbands, channels, polarizations } = survey.dataset.shape;
  const each = subbands * channels * polarizations;
  const noise = new Float64Array(survey.baselines.length * bands.length * polarizations);
  for (let baseline = 0; baseline < survey.baselines.length; baseline++) {
    for (const [b, band] of bands.entries()) {
      for (let p = 0; p < polarizations; p++) {
        const sigma = median(
          Float64Array.from(
            { length: band.columns },
            (_, c) => survey.levels.sigma[baseline * each + (band.first + c) * polarizations + p]!,
          ),
        );
        noise[(baseline * bands.length + b) * polarizations + p] = 2 * sigma * sigma;
      }
    }
  }
  return noise;
}

/** Angle from the pointing centre within which a source may be in sight, radians. */
function angleInSight({ dataset }: Survey, setup: number): number {
  const wavelength = SPEED_OF_LIGHT / median(dataset.setups[setup]!.frequencies);
  const diameter = median(dataset.array.antennas.map(({ diameter: d }) => d ?? Number.NaN));
  return diameter > 0 ? Math.min(1, (BEAMWIDTHS_IN_SIGHT * wavelength) / diameter) : DEFAULT_SIGHT;
}
