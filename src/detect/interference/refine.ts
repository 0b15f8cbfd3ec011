/** Cells of a region chosen again by the samples of those whom it hits, since the runs that found it reach over edges. */
import type { Band } from "../pass/bands.ts";
import { boundsOf, linesOf, type Region, shifted } from "./components.ts";
import { addCounts, type Grid, noCounts } from "./grid.ts";
import { likelihood, whoIsHit } from "./subset.ts";

/** Steps and columns around a region that are looked at too. */
const MARGIN = 2;
/** Samples of a cell that tell whether it is hit. */
const FEWEST_IN_CELL = 16;
const ROUNDS = 3;
/** Weight of a neighbour's gain against a cell's own, and the most of it that counts. */
const NEIGHBOURS = 0.5;
const MOST_OF_NEIGHBOUR = 4;

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
  let cells: Region = region;
  for (let round = 0; round < ROUNDS && cells.length > 0; round++) {
    const inside = noCounts();
    for (const cell of cells) {
      addCounts(inside, counts[placeOf(Math.floor(cell / columns), cell % columns)]!);
    }
    if (inside.usable < FEWEST_IN_CELL * cells.length) return cells;
    const share = inside.elevated / inside.usable;
    const gains = Float64Array.from(counts, (count) => likelihood(count, share));
    const next: number[] = [];
    for (let place = 0; place < gains.length; place++) {
      if (gains[place]! + NEIGHBOURS * aroundOf(gains, place, width) <= 0) continue;
      next.push((bounds.firstStep + Math.floor(place / width)) * columns + bounds.low + (place % width));
    }
    cells = next;
  }
  return cells;
}

/** Sum over the neighbours before and after in time and in frequency, each kept from deciding alone. */
function aroundOf(gains: Float64Array, place: number, width: number): number {
  const column = place % width;
  let sum = 0;
  if (place >= width) sum += clipped(gains[place - width]!);
  if (place + width < gains.length) sum += clipped(gains[place + width]!);
  if (column > 0) sum += clipped(gains[place - 1]!);
  if (column + 1 < width) sum += clipped(gains[place + 1]!);
  return sum;
}

function clipped(gain: number): number {
  return Math.max(-MOST_OF_NEIGHBOUR, Math.min(MOST_OF_NEIGHBOUR, gain));
}
