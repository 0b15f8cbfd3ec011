/** Cells of a region chosen again by the samples of those whom it hits, since the runs that found it reach over edges. */
import type { Band } from "../pass/bands.ts";
import { boundsOf, linesOf, type Region, shifted } from "./components.ts";
import { type Grid, noCounts } from "./grid.ts";
import { likelihood, whoIsHit } from "./subset.ts";

/** Steps and columns around a region that are looked at too. */
const MARGIN = 2;
/** Samples of a cell that tell whether it is hit. */
const FEWEST_IN_CELL = 16;

/** The region as it is where a cell has too few samples to tell; possibly empty. */
export function refined(grid: Grid, band: Band, region: Region): Region {
  if (grid.pass.marks === null) return region;
  const { columns } = band;
  const inner = boundsOf(region, columns);
  const bounds = {
    firstStep: Math.max(0, inner.firstStep - MARGIN),
    lastStep: Math.min(grid.steps - 1, inner.lastStep + MARGIN),
    low: Math.max(0, inner.low - MARGIN),
    high: Math.min(columns - 1, inner.high + MARGIN),
  };
  const lines = linesOf(region, columns).map(({ step, low, high }) =>
    shifted({ firstStep: step, lastStep: step, low, high }, band),
  );
  const { subset } = whoIsHit(grid, lines);
  const width = bounds.high - bounds.low + 1;
  const counts = Array.from({ length: width * (bounds.lastStep - bounds.firstStep + 1) }, noCounts);
  const placeOf = (step: number, column: number) => (step - bounds.firstStep) * width + column - bounds.low;
  grid.count(shifted(bounds, band), subset, counts, (_, step, column) => placeOf(step, column - band.first));
  const inside = noCounts();
  for (const cell of region) {
    const { usable, elevated } = counts[placeOf(Math.floor(cell / columns), cell % columns)]!;
    inside.usable += usable;
    inside.elevated += elevated;
  }
  if (inside.usable < FEWEST_IN_CELL * region.length) return region;
  const share = inside.elevated / inside.usable;
  const cells: number[] = [];
  counts.forEach(({ usable, elevated }, place) => {
    if (likelihood(usable, elevated, share) <= 0) return;
    cells.push((bounds.firstStep + Math.floor(place / width)) * columns + bounds.low + (place % width));
  });
  return cells;
}
