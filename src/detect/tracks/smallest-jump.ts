/** What jump would have been found: the honest figure beside "no jumps". */
import type { Survey } from "../../measure/survey-result.ts";
import { median } from "../../util/statistics.ts";
import { gridOf } from "./grid.ts";
import { degrees } from "./make-event.ts";
import { JUMP_THRESHOLD } from "./phase-jumps.ts";
import { phaseStep, stepsOf, WINDOWS } from "./step-search.ts";

/**
 * @returns degrees: the smallest lasting jump of a typical antenna, in all products, that noise and wander would have left
 * visible; NaN where even a half turn would not have been
 */
export function smallestJump(survey: Survey): number {
  const grid = gridOf(survey);
  if (grid.planes.length === 0) return Number.NaN;
  let least = Number.POSITIVE_INFINITY;
  for (const window of WINDOWS) {
    if (!grid.segments.some(({ start, end }) => end - start >= 2 * window)) break;
    const { scale, error } = stepsOf(grid, grid.planes, window, phaseStep);
    const size = Math.max(median(scale), median(error));
    if (size > 0) least = Math.min(least, degrees(JUMP_THRESHOLD * size));
  }
  return least <= 180 ? least : Number.NaN;
}
