/** Of the memory that the user grants the program, what goes to a survey. */

import type { Dataset } from "../dataset/dataset.ts";

/** Bytes that the program may take where the user says nothing. */
export const DEFAULT_MEMORY = 1e9;
/** Of all. The rest is for the program itself, its threads' buffers, and the passes after the survey. */
const SURVEY_SHARE = 0.25;

/**
 * Bytes that the state of a survey may take. It settles what shares sketches and bins, so it follows from the user's
 * bound alone, and not from how many threads there are.
 */
export function surveyMemory(memory: number): number {
  return Math.floor(SURVEY_SHARE * memory);
}

/** Bytes of a sketch of a steady amplitude or of noise, its directory among them. */
const SKETCH_BYTES = 1100;

/** About what a thread that surveys some of the rows holds for itself: sketches of all baselines, not their tracks. */
export function threadStateBytes({ array, shape, rows }: Dataset, memory: number): number {
  const antennas = Math.max(2, array.antennas.length);
  const baselines = Math.min((antennas * (antennas - 1)) / 2, rows);
  const samples = shape.subbands * shape.channels * shape.polarizations;
  return Math.min(surveyMemory(memory) / 2, baselines * samples * SKETCH_BYTES);
}
