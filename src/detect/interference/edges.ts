/** Edges of a rectangle moved to where its samples stop being elevated. */

import type { Band } from "../pass/bands.ts";
import { ELEVATED_SHARE } from "../pass/marks.ts";
import { type Grid, noCounts, type Rectangle, type Subset } from "./grid.ts";
import { likelihood } from "./subset.ts";

/** An edge grows while the line beyond gains this much log likelihood, and shrinks while its last line loses. */
const GROWTH = 3;
const MOST_GROWTH = 64;
/** A piece with less than this share of the elevated samples that all pieces have is none. */
const LEAST_OF_ALL = 0.6;

type Side = "firstStep" | "lastStep" | "low" | "high";
const SIDES: readonly Side[] = ["firstStep", "lastStep", "low", "high"];

/** Edges of one rectangle moved; of several, which lie side by side, only inwards, and the poor ones left out. */
export function settleAll(
  grid: Grid,
  rectangles: readonly Rectangle[],
  subset: Subset,
  band: Band,
): readonly Rectangle[] {
  if (grid.pass.marks === null) return rectangles;
  if (rectangles.length === 1) return [settleEdges(grid, rectangles[0]!, subset, band, MOST_GROWTH)];
  const all = noCounts();
  for (const rectangle of rectangles) grid.count(rectangle, subset, [all], () => 0);
  const least = LEAST_OF_ALL * (all.elevated / all.usable);
  const kept = rectangles
    .map((rectangle) => settleEdges(grid, rectangle, subset, band, 0))
    .filter((rectangle) => {
      const { usable, elevated } = grid.total(rectangle, subset);
      return usable > 0 && elevated >= least * usable;
    });
  return kept.length > 0 ? kept : rectangles;
}

function settleEdges(
  grid: Grid,
  rectangle: Rectangle,
  subset: Subset,
  band: Band,
  growth: number,
): Rectangle {
  let settled = rectangle;
  const { usable, elevated } = grid.total(rectangle, subset);
  if (usable === 0) return rectangle;
  const share = Math.max(elevated / usable, 2 * ELEVATED_SHARE);
  const value = (line: Rectangle) => {
    const counts = noCounts();
    grid.count(line, subset, [counts], () => 0);
    return likelihood(counts, share);
  };
  for (const side of SIDES) {
    let moved = 0;
    while (canShrink(settled, side) && value(lineOf(settled, side, 0)) < 0) {
      settled = { ...settled, [side]: settled[side] + inward(side) };
      moved += 1;
    }
    if (moved > 0) continue;
    for (let n = 0; n < growth; n++) {
      const next = settled[side] - inward(side);
      const inside =
        side === "low" || side === "high"
          ? next >= band.first && next < band.first + band.columns
          : next >= 0 && next < grid.steps;
      if (!inside || value(lineOf(settled, side, 1)) < GROWTH) break;
      settled = { ...settled, [side]: next };
    }
  }
  return settled;
}

function inward(side: Side): number {
  return side === "firstStep" || side === "low" ? 1 : -1;
}

function canShrink({ firstStep, lastStep, low, high }: Rectangle, side: Side): boolean {
  return side === "low" || side === "high" ? low < high : firstStep < lastStep;
}

/** The line at a side: the last inside, or the one beyond. */
function lineOf(rectangle: Rectangle, side: Side, beyond: 0 | 1): Rectangle {
  const at = rectangle[side] - beyond * inward(side);
  return side === "low" || side === "high"
    ? { ...rectangle, low: at, high: at }
    : { ...rectangle, firstStep: at, lastStep: at };
}
