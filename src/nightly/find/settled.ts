/** Files that are still being written are waited for. */
import { stat } from "node:fs/promises";
import { setTimeout as sleep } from "node:timers/promises";
import type { Candidate } from "./candidates.ts";

export interface Patience {
  /** a file that has not changed for so long is whole, seconds */
  readonly rest: number;
  /** waited for at most so long, seconds */
  readonly wait: number;
}

const LOOK_EVERY_SECONDS = 2;

/**
 * The candidates as they come to rest, oldest first; those that do not within the time are given to `unsettled`.
 *
 * @param now seconds; a clock that tests can turn
 */
export async function* settled(
  candidates: readonly Candidate[],
  patience: Patience,
  unsettled: (candidate: Candidate) => void,
  now: () => number = () => Date.now() / 1000,
): AsyncIterable<Candidate> {
  const start = now();
  let waiting = [...candidates];
  while (waiting.length > 0) {
    const restless: Candidate[] = [];
    for (const candidate of waiting) {
      if ((await lastChange(candidate)) + patience.rest <= now()) yield candidate;
      else restless.push(candidate);
    }
    if (restless.length === 0) return;
    if (now() - start >= patience.wait) {
      restless.forEach(unsettled);
      return;
    }
    waiting = restless;
    await sleep(Math.min(LOOK_EVERY_SECONDS, Math.max(0.05, patience.rest / 4)) * 1000);
  }
}

/** Seconds; one that has gone meanwhile never comes to rest. */
async function lastChange({ files }: Candidate): Promise<number> {
  const times = await Promise.all(
    files.map((file) =>
      stat(file)
        .then(({ mtimeMs }) => mtimeMs / 1000)
        .catch(() => Number.POSITIVE_INFINITY),
    ),
  );
  return Math.max(...times);
}
