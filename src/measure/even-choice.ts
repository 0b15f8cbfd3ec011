/** Some of very many baselines, evenly of every antenna, the same whatever order they were met in. */
import type { Baseline } from "./survey-result.ts";

/**
 * Baselines that are looked at one by one: in tables and by detectors of antenna faults. Each antenna of thousands then
 * keeps some sixty of its own.
 */
export const MOST_BASELINES = 1 << 16;

/** Numbers of the baselines chosen, ascending; all of them where they are not too many. */
export function evenChoice(baselines: readonly Baseline[]): Int32Array {
  const { length } = baselines;
  if (length <= MOST_BASELINES) return Int32Array.from({ length }, (_, b) => b);
  // A tenth of room, since chance does not keep to a share.
  const share = MOST_BASELINES / 1.1 / length;
  const chosen: number[] = [];
  for (let b = 0; b < length; b++) {
    const { antenna1, antenna2 } = baselines[b]!;
    if (lot(antenna1, antenna2) < share) chosen.push(b);
  }
  return Int32Array.from(chosen);
}

/** A fixed, evenly spread number 0..1 of each baseline: those below a share are an even choice. */
export function lot(antenna1: number, antenna2: number): number {
  let hash = Math.imul(antenna1, 0x9e3779b1) ^ Math.imul(antenna2, 0x85ebca6b);
  hash = Math.imul(hash ^ (hash >>> 15), 0xc2b2ae35);
  return ((hash ^ (hash >>> 13)) >>> 0) / 2 ** 32;
}
