/** The surveying pass over some of the rows. */
import type { Dataset } from "../dataset/dataset.ts";
import { SurveyPart } from "./survey-part.ts";

export interface SurveyRowsOptions {
  readonly onProgress?: (rowsDone: number, rows: number) => void;
  /** rows to survey, [first, last) from 0; default all */
  readonly rows?: readonly [number, number];
  /**
   * Bytes that the survey's state may take, default a quarter of 1 GB. Where they do not suffice, neighbouring channels share
   * amplitude levels, and time bins take the place of integrations in the tracks.
   */
  readonly memory?: number;
  readonly blockRows?: number;
}

/** Samples of a block: small enough that its arrays stay in the processor's cache from one accumulator to the next. */
const BLOCK_SAMPLES = 1 << 15;

/**
 * The state of a survey of some rows, to be merged with that of the others.
 *
 * @throws InputError where the dataset turns out to be malformed
 */
export async function surveyPart(dataset: Dataset, options: SurveyRowsOptions = {}): Promise<SurveyPart> {
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  const rows = options.rows ?? [0, dataset.rows];
  const blockRows = options.blockRows ?? Math.max(1, Math.floor(BLOCK_SAMPLES / rowSamples));
  const part = new SurveyPart(dataset, options.memory);
  part.expect(rows[1] - rows[0]);
  let done = 0;
  for await (const block of dataset.blocks({ want: "samples", rows, blockRows })) {
    part.add(block);
    done += block.rows;
    options.onProgress?.(done, rows[1] - rows[0]);
  }
  return part;
}

/** One part of several, which share out the rows between them. They are used up. */
export function joinParts(parts: readonly [SurveyPart, ...SurveyPart[]]): SurveyPart {
  const [first, ...others] = parts;
  for (const other of others) first.merge(other);
  return first;
}
