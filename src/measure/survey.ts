/** The surveying pass: read the dataset once in blocks and fill the measures. */
import type { Dataset } from "../dataset/dataset.ts";
import { finishSurvey } from "./finish-survey.ts";
import { settleSurvey } from "./settings.ts";
import { SurveyPart } from "./survey-part.ts";
import type { Survey } from "./survey-result.ts";

export interface SurveyOptions {
  readonly onProgress?: (rowsDone: number, rows: number) => void;
  /** bytes that the survey's state may take; see SurveySettings for what gives when they do not suffice */
  readonly memory?: number;
  readonly blockRows?: number;
}

/** Samples of a block: small enough that its arrays stay in the processor's cache from one accumulator to the next. */
const BLOCK_SAMPLES = 1 << 15;

/** @throws InputError where the dataset turns out to be malformed */
export async function surveyDataset(dataset: Dataset, options: SurveyOptions = {}): Promise<Survey> {
  const settings = await settleSurvey(dataset, options.memory);
  const part = new SurveyPart(dataset, settings);
  const { subbands, channels, polarizations } = dataset.shape;
  const blockRows =
    options.blockRows ?? Math.max(1, Math.floor(BLOCK_SAMPLES / (subbands * channels * polarizations)));
  let done = 0;
  for await (const block of dataset.blocks({ want: "samples", blockRows })) {
    part.add(block);
    done += block.rows;
    options.onProgress?.(done, dataset.rows);
  }
  return finishSurvey(part);
}
