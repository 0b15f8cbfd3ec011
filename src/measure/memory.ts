/** Of the memory that the user grants the program, what goes to a survey. */

import type { Dataset } from "../dataset/dataset.ts";
import { MOST_BASELINES } from "./even-choice.ts";
import { CELL_BYTES, PRODUCT_BYTES } from "./track-columns.ts";

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

/** A thread without its state: the program, its buffers, its stack. */
const THREAD_BYTES = 80e6;
/** Of all the memory, what the threads of a survey may take between them. */
const THREADS_SHARE = 0.6;

/** About what the sketches of all baselines take, which every thread that surveys some of the rows has for itself. */
export function sketchBytesOf({ array, shape, rows }: Dataset, memory: number): number {
  const antennas = Math.max(2, array.antennas.length);
  const baselines = Math.min((antennas * (antennas - 1)) / 2, rows);
  const samples = shape.subbands * shape.channels * shape.polarizations;
  return Math.min(memory / 2, baselines * samples * SKETCH_BYTES);
}

/** Of each thread of passes over arrays of very many baselines: uv grids of as many cells, and which flags each meets. */
const LARGE_ARRAY_BYTES = 250e6;

/** What a thread of any pass takes beside its program and buffers, where that is much. */
export function passBytesOf({ array, rows }: Dataset): number {
  const antennas = Math.max(2, array.antennas.length);
  return Math.min((antennas * (antennas - 1)) / 2, rows) > MOST_BASELINES ? LARGE_ARRAY_BYTES : 0;
}

/**
 * Threads that a survey may be shared out to, as its memory goes. Rows that are kept are shared out with the work; time
 * bins, which take their place where they do not fit, every thread has for itself, and twice where it widens them.
 *
 * @param memory of the survey
 */
export function surveyThreads(dataset: Dataset, memory: number): number {
  const { subbands, polarizations } = dataset.shape;
  const rowBytes = CELL_BYTES + PRODUCT_BYTES * subbands * polarizations;
  const isBinned = dataset.rows * rowBytes > memory / 2;
  // Sketches have half as much room again to grow into, and are there once more as they are handed over.
  const own = THREAD_BYTES + 2 * sketchBytesOf(dataset, memory) + (isBinned ? memory : 0);
  return Math.max(1, Math.floor((THREADS_SHARE * (memory / SURVEY_SHARE)) / own));
}
