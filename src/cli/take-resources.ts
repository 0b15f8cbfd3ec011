/** `--jobs` and `--memory` understood: bytes, and the threads for a dataset. */
import { availableParallelism } from "node:os";
import type { Dataset } from "../dataset/dataset.ts";
import { passBytesOf } from "../measure/memory.ts";
import { InputError } from "../util/errors.ts";
import { parseSize } from "../util/units.ts";
import { Workers } from "../util/workers.ts";
import { DEFAULT_MEMORY, MOST_JOBS_UNASKED, type ResourceOptions } from "./resources.ts";

const MOST_JOBS = 256;
/** Below this, starting threads costs more than they gain. */
const SMALL_BYTES = 64e6;
/** With less not even small data have room. */
const LEAST_MEMORY = 256e6;
/** Of the memory, what threads may take between them, each its program and buffers; a survey may take fewer. */
const THREADS_SHARE = 0.6;
const THREAD_BYTES = 80e6;

/** @returns bytes. @throws InputError when it is no size, or too small */
export function memoryOf({ memory }: Pick<ResourceOptions, "memory">): number {
  const bytes = Math.floor(parseSize(memory ?? DEFAULT_MEMORY, { part: "--memory" }));
  if (bytes >= LEAST_MEMORY) return bytes;
  throw new InputError(
    `${memory} is too little: expected at least ${LEAST_MEMORY / 1e6} MB`,
    { part: "--memory" },
    "The default is 1 GB",
  );
}

/**
 * The threads to take for a dataset, or undefined for none but the main one. What they find does not depend on how many
 * they are, so there may be fewer than asked for where the memory would not hold them.
 *
 * @param share of the rows that will be read
 */
export function workersFor(options: ResourceOptions, dataset: Dataset, share = 1): Workers | undefined {
  const jobs = jobsOf(options, dataset, share);
  return jobs === 1 ? undefined : new Workers(jobs);
}

function jobsOf(options: ResourceOptions, dataset: Dataset, share: number): number {
  const { jobs } = options;
  if (jobs !== undefined && !(Number.isInteger(jobs) && jobs >= 1 && jobs <= MOST_JOBS)) {
    throw new InputError(`${jobs} is no number of threads: expected a whole number from 1 to ${MOST_JOBS}`, {
      part: "--jobs",
    });
  }
  const unasked =
    share * dataset.bytes < SMALL_BYTES ? 1 : Math.min(availableParallelism(), MOST_JOBS_UNASKED);
  const memory = memoryOf(options);
  const room = THREADS_SHARE * memory;
  const most = Math.floor(room / (THREAD_BYTES + passBytesOf(dataset)));
  return Math.max(1, Math.min(jobs ?? unasked, most));
}
