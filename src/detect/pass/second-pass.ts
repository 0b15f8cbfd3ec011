/**
 * The second pass over the samples, where the survey's screen leaves something to be seen. It leaves bits of what stands
 * out, scores added over baselines, and tracks without what stands out.
 */
import type { Survey } from "../../measure/survey-result.ts";
import type { Workers } from "../../util/workers.ts";
import { type Band, bandsOf } from "./bands.ts";
import { type Choice, choose } from "./choice.ts";
import { CleanTracks } from "./clean-tracks.ts";
import { CombinedScores, scoreForm } from "./combined.ts";
import { ChannelKurtosis } from "./kurtosis.ts";
import { newSampleMarks, type SampleMarks } from "./marks.ts";
import { sharedTiles } from "./share-tiles.ts";
import { SAMPLED_STEPS, TileAnalysis } from "./tile-analysis.ts";
import type { TileResult } from "./tile-result.ts";

export interface SecondPass {
  readonly bands: readonly Band[];
  readonly choice: Choice;
  /** null where the dataset is too large to keep a bit a sample */
  readonly marks: SampleMarks | null;
  /** of what was looked at with all baselines */
  readonly combined: CombinedScores;
  /** of what was looked at as a sample, and all besides, in wide bins of time; null: there is no such sample */
  readonly sampled: CombinedScores | null;
  readonly clean: CleanTracks;
  readonly kurtosis: ChannelKurtosis;
}

export interface SecondPassOptions {
  readonly onProgress?: ((rowsDone: number, rows: number) => void) | undefined;
  /** what to look at; default by the screen */
  readonly choice?: Choice;
  /** threads that share the tiles; none: this one does them all. The result is the same. */
  readonly workers?: Workers | undefined;
}

/** @throws InputError where the dataset turns out to be malformed */
export async function secondPass(survey: Survey, options: SecondPassOptions = {}): Promise<SecondPass> {
  const choice = options.choice ?? choose(survey);
  const { rows } = survey.dataset;
  options.onProgress?.(0, rows);
  const sum = new PassSum(survey, choice);
  const numbers = tilesToRead(choice);
  for await (const result of tileResults(survey, choice, numbers, options.workers)) {
    sum.add(result);
    options.onProgress?.(Math.min(rows, (result.tile + 1) * choice.cut.tileRows), rows);
  }
  options.onProgress?.(rows, rows);
  return sum.finish();
}

/** In the order of the numbers. */
async function* tileResults(
  survey: Survey,
  choice: Choice,
  numbers: readonly number[],
  workers: Workers | undefined,
): AsyncGenerator<TileResult> {
  if (numbers.length === 0) return;
  if (workers !== undefined && survey.dataset.recipe !== undefined && numbers.length > 1) {
    yield* sharedTiles(survey, choice, numbers, workers);
    return;
  }
  const analysis = new TileAnalysis(survey, choice);
  for (const number of numbers) yield await analysis.tile(number);
}

/** Numbers of the tiles that have to be read, ascending. */
export function tilesToRead({ looks, leftOut }: Choice): number[] {
  const numbers = [...looks.keys()];
  return leftOut === null ? numbers.filter((number) => looks[number] !== null) : numbers;
}

/** Adds up the results of tiles, which have to come in ascending order. */
export class PassSum {
  private readonly survey: Survey;
  private readonly choice: Choice;
  private readonly marks: SampleMarks | null;
  private readonly combined: CombinedScores;
  private readonly sampled: CombinedScores | null;
  private readonly clean: CleanTracks;
  private readonly kurtosis: ChannelKurtosis;

  constructor(survey: Survey, choice: Choice) {
    const { subbands, channels, polarizations } = survey.dataset.shape;
    this.survey = survey;
    this.choice = choice;
    this.marks = newSampleMarks(survey);
    this.combined = new CombinedScores(scoreForm(survey));
    this.sampled = choice.leftOut === null ? null : new CombinedScores(scoreForm(survey, SAMPLED_STEPS));
    this.clean = new CleanTracks(survey);
    this.kurtosis = new ChannelKurtosis(subbands * channels, polarizations);
  }

  add({ cells, seen, marks, scores, sampled, kurtosis, means }: TileResult): void {
    if (marks !== null && this.marks !== null) {
      for (const name of ["usable", "elevated", "outlying", "bright"] as const) {
        for (let row = 0; row < seen; row++) this.marks[name].setRow(cells[row]!, marks[name], row);
      }
    }
    if (scores !== null) this.combined.add(scores);
    if (sampled !== null) this.sampled?.add(sampled);
    this.kurtosis.join(kurtosis);
    this.clean.add(cells, means);
  }

  finish(): SecondPass {
    this.clean.finish();
    const { choice, marks, combined, sampled, clean, kurtosis } = this;
    const bands = bandsOf(this.survey.dataset.shape);
    return { bands, choice, marks, combined, sampled, clean, kurtosis };
  }
}
