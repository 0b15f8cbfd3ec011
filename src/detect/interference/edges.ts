/** Edges of a rectangle moved to where its samples stop being elevated. */

import type { Band } from "../pass/bands.ts";
import { ELEVATED_SHARE } from "../pass/second-pass.ts";
import { type Grid, noCounts, type Rectangle, type Subset } from "./grid.ts";
import { likelihood } from "./subset.ts";

/** An edge grows while the line beyond gains this much log likelihood, and shrinks while its last line loses. */
const GROWTH = 3;
const MOST_GROWTH = 64;

type Side = "firstStep" | "lastStep" | "low" | "high";
const SIDES: readonly Side[] = ["firstStep", "lastStep", "low", "high"];

export function settleEdges(grid: Grid, rectangle: Rectangle, subset: Subset, band: Band): Rectangle {
  if (grid.pass.marks === null) return rectangle;
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
    for (let n = 0; n < MOST_GROWTH; n++) {
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
