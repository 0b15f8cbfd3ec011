/** One tile: each baseline's planes against their own background and noise. */
import { EARTH_ROTATION_RATE } from "../../geometry/sidereal.ts";
import type { Survey } from "../../measure/survey-result.ts";
import { SECONDS_PER_DAY, SPEED_OF_LIGHT } from "../../util/constants.ts";
import { median } from "../../util/statistics.ts";
import { fillScores } from "../statistics/normal.ts";
import { SumThresholdRoom, type SumThresholdSettings, sumThreshold } from "../statistics/sum-threshold.ts";
import { AveragedRows } from "./averaged-rows.ts";
import { Background } from "./background.ts";
import { type Band, bandsOf } from "./bands.ts";
import { type Choice, SAMPLED, SEEN } from "./choice.ts";
import { type ScoreForm, scoreForm, TileScores } from "./combined.ts";
import { ChannelKurtosis } from "./kurtosis.ts";
import { fillMarks, markWords, SINGLE_SCORE } from "./marks.ts";
import { Normaliser } from "./normalise.ts";
import { Plane } from "./plane.ts";
import { addRowMeans, type MeansOf } from "./row-means.ts";
import {
  joinMeans,
  newMarks,
  newMeans,
  type RowMarks,
  type RowMeans,
  type TileResult,
} from "./tile-result.ts";
import { type RowRun, type Tile, TileReader } from "./tiles.ts";
import { fillScoresInTime, indexOfTime } from "./time-axis.ts";

/** Offringa et al. 2010. Longer runs are for the sums over baselines: one baseline's background is not that well known. */
const ON_BASELINE: SumThresholdSettings = {
  first: SINGLE_SCORE,
  ratio: 1.5,
  longestTime: 16,
  longestFrequency: 16,
};
/** Sources are in sight within this many beamwidths of the pointing centre, and at most this far (radians). */
const BEAMWIDTHS_IN_SIGHT = 2;
const DEFAULT_SIGHT = 0.035;
/** Bins of time of the sums of what is looked at as a sample. */
export const SAMPLED_STEPS = 64;

/** The result of a tile as it grows. */
interface Result {
  readonly look: Uint8Array;
  readonly marks: RowMarks | null;
  readonly scores: TileScores | null;
  readonly sampled: TileScores | null;
  readonly kurtosis: ChannelKurtosis;
  readonly means: RowMeans;
}

export class TileAnalysis {
  private readonly survey: Survey;
  private readonly choice: Choice;
  private readonly reader: TileReader;
  private readonly bands: readonly Band[];
  private readonly words: number;
  private readonly form: ScoreForm;
  private readonly sampleForm: ScoreForm;
  private readonly meansOf: MeansOf;
  /** null: rows that are not looked at are not averaged either */
  private readonly averaged: AveragedRows | null;
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

  constructor(survey: Survey, choice: Choice) {
    this.survey = survey;
    this.choice = choice;
    const { dataset } = survey;
    this.reader = new TileReader(survey, choice.cut);
    this.bands = bandsOf(dataset.shape);
    this.words = markWords(survey);
    this.form = scoreForm(survey);
    this.sampleForm = scoreForm(survey, SAMPLED_STEPS);
    this.meansOf = { shape: dataset.shape, fill: choice.isWhole, leftOut: choice.leftOut };
    // A cell of several rows has no averages of each.
    this.averaged =
      choice.leftOut === null || survey.tracks.binSeconds > 0
        ? null
        : new AveragedRows(survey, choice.leftOut, Math.min(choice.cut.tileRows, dataset.rows));
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

  /** @throws InputError where the dataset turns out to be malformed */
  async tile(number: number): Promise<TileResult> {
    const { survey, choice, words, averaged } = this;
    const { shape } = survey.dataset;
    const products = shape.subbands * shape.polarizations;
    const look = choice.looks[number] ?? new Uint8Array(survey.baselines.length);
    averaged?.clear();
    const other = averaged === null ? null : averaged.add.bind(averaged);
    const tile = await this.reader.read(number, look, other);
    const { rows } = tile;
    const [first, last] = timesOf(survey.times, tile);
    const result: Result = {
      look,
      marks: words === 0 ? null : newMarks(rows * words),
      scores: rows > 0 && look.includes(SEEN) ? new TileScores(this.form, first, last) : null,
      sampled: rows > 0 && choice.leftOut !== null ? new TileScores(this.sampleForm, first, last) : null,
      kurtosis: new ChannelKurtosis(shape.subbands * shape.channels, shape.polarizations),
      means: newMeans(rows * products),
    };
    for (const run of tile.runs()) this.addRun(result, tile, run);
    const { marks, scores, sampled, kurtosis, means } = result;
    const others = averaged === null ? null : averaged.cells.subarray(0, averaged.rows);
    const cells = new Int32Array(rows + (others?.length ?? 0));
    cells.set(tile.cell.subarray(0, rows));
    if (others !== null) cells.set(others, rows);
    return {
      tile: number,
      cells,
      seen: rows,
      marks,
      scores: scores?.plain() ?? null,
      sampled: sampled?.plain() ?? null,
      kurtosis: kurtosis.plain(),
      means:
        averaged === null
          ? means
          : joinMeans(means, rows * products, averaged.means, averaged.rows * products),
    };
  }

  private addRun(result: Result, tile: Tile, run: RowRun): void {
    const { polarizations } = this.survey.dataset.shape;
    for (const [b, band] of this.bands.entries()) {
      for (let p = 0; p < polarizations; p++) this.addPlane(result, tile, run, b, band, p);
    }
    if (this.bands.length === 0) this.addShort(result, tile, run);
  }

  private addPlane(result: Result, tile: Tile, run: RowRun, b: number, band: Band, p: number): void {
    const { plane, background, normaliser, survey } = this;
    const { tracks } = survey;
    const { polarizations } = survey.dataset.shape;
    plane.take(tile, run, band, p, polarizations);
    const noise = this.noise[(run.baseline * this.bands.length + b) * polarizations + p]!;
    const steepness = this.steepness[run.setup]!;
    const cellOf = (row: number) => tile.cell[tile.order[run.first + row]!]!;
    const length = (row: number) => Math.hypot(tracks.u[cellOf(row)]!, tracks.v[cellOf(row)]!);
    const lasts = tracks.time[cellOf(run.rows - 1)]! - tracks.time[cellOf(0)]!;
    const spacing = (lasts * SECONDS_PER_DAY) / Math.max(1, run.rows - 1);
    background.fit(
      plane,
      noise,
      (row) => steepness * length(row),
      this.swiftness[run.setup]! * length(0) * (spacing || 0),
    );
    result.kurtosis.add(plane, band, p);
    const typical = normaliser.apply(plane, background.bandpass);
    fillScores(plane.power, plane.rows * plane.columns);
    sumThreshold(plane.power, plane.marks, plane.rows, plane.columns, ON_BASELINE, this.room);
    this.keep(result, tile, run, band, p, (row) => typical * normaliser.rowNoise[row]!);
  }

  /** Too few channels to look along frequency: each product against its neighbours in time. */
  private addShort(result: Result, tile: Tile, run: RowRun): void {
    const { plane, survey } = this;
    const { subbands, channels, polarizations } = survey.dataset.shape;
    const band: Band = { first: 0, columns: subbands * channels, subband: null };
    for (let p = 0; p < polarizations; p++) {
      plane.take(tile, run, band, p, polarizations);
      fillScoresInTime(plane, (row) => survey.tracks.scan[tile.cell[tile.order[run.first + row]!]!]!);
      for (let i = 0; i < plane.rows * plane.columns; i++) {
        if (plane.marks[i] === 0 && plane.power[i]! > SINGLE_SCORE) plane.marks[i] = 1;
      }
      this.keep(result, tile, run, band, p, () => Number.NaN);
    }
  }

  private keep(
    { look, marks, scores, sampled, means }: Result,
    tile: Tile,
    run: RowRun,
    band: Band,
    p: number,
    noiseOf: (row: number) => number,
  ): void {
    const { plane, survey, words } = this;
    const { columns, power, marks: found } = plane;
    const { shape } = survey.dataset;
    const { baseline } = run;
    const how = look[baseline]!;
    let time = 0;
    for (let row = 0; row < run.rows; row++) {
      const r = tile.order[run.first + row]!;
      time = indexOfTime(survey.times, tile.time[r]!, time);
      const at = row * columns;
      if (how === SEEN) scores?.add(baseline, time, band.first, p, power, found, at, columns);
      if (how >= SAMPLED) sampled?.add(baseline, time, band.first, p, power, found, at, columns);
      if (marks !== null) fillMarks(marks, r, words, band, p, shape, plane, row);
      addRowMeans(means, this.meansOf, r, band, p, plane, row, noiseOf(row));
    }
  }
}

/** Indices of the first and last integration of a tile's rows. */
function timesOf(times: Float64Array, { time, rows }: Tile): [number, number] {
  let [low, high] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY];
  for (let row = 0; row < rows; row++) {
    low = Math.min(low, time[row]!);
    high = Math.max(high, time[row]!);
  }
  return [indexOfTime(times, low), indexOfTime(times, high)];
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
