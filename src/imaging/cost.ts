/**
 * What dropping selections of samples would cost the planned image: each selection's own samples are gridded, taken
 * from the grid of all, and the rest is weighted and transformed again.
 */
import type { Selection } from "../dataset/selection.ts";
import type { BeamMaker, MadeBeam } from "./beams.ts";
import { cellsWithout, truncated } from "./cell-weights.ts";
import { plannedSpacings } from "./coverage.ts";
import type { CoverageTally, RadialGap } from "./coverage-tally.ts";
import { type Gridded, type GridRequest, gridSelections, SELECTION_ORDER } from "./grid-dataset.ts";
import type { FilledCells } from "./moment-grid.ts";
import type { Plan } from "./plan.ts";

/** Relative changes, (after - before)/before, of the planned weighting's beam; NaN where one of them is unknown. */
export interface SelectionCost {
  /** 1 - sqrt(sum of kept weights / sum of all), natural weighting */
  readonly sensitivityLossFraction: number;
  readonly beamMajorChangeFraction: number;
  readonly beamMinorChangeFraction: number;
  readonly peakSidelobeChangeFraction: number;
  /** of the outer over inner radius of the largest radial gap, 1 where there is none */
  readonly largestGapChangeFraction: number;
}

/** What a forecast keeps so that costs need no second gridding of all the data. */
export interface GriddedImage {
  readonly request: GridRequest;
  readonly plan: Plan;
  readonly gridded: Gridded;
  /** every usable sample */
  readonly cells: FilledCells;
  readonly maker: BeamMaker;
  /** what selections are taken from, with its beam; made when the first cost is asked for */
  readonly whole: { current: Whole | null };
}

interface Whole {
  readonly cells: FilledCells;
  readonly beam: MadeBeam;
}

function wholeOf({ whole, cells, maker, plan }: GriddedImage): Whole {
  if (whole.current === null) {
    const few = truncated(cells, Math.min(SELECTION_ORDER, cells.form.order));
    whole.current = { cells: few, beam: maker.make(few, plan.weighting.value) };
  }
  return whole.current;
}

/** Selections gridded together hold no more than this. */
const MOST_BYTES = 200e6;

/** Call `visit` with the uv cells of each selection, and the coverage that goes with it, few at a time in memory. */
export async function eachSelection(
  image: GriddedImage,
  selections: readonly Selection[],
  visit: (index: number, taken: FilledCells, lost: CoverageTally) => void,
): Promise<void> {
  const { request, gridded, cells } = image;
  const cellBytes = 8 * (((SELECTION_ORDER + 1) * (SELECTION_ORDER + 2)) / 2 + 1);
  // Every thread has grids of its own, and this one those of them all.
  const share = MOST_BYTES / (1 + (request.workers?.jobs ?? 0));
  const batch = Math.max(1, Math.floor(share / Math.max(1, cells.count * cellBytes)));
  for (let from = 0; from < selections.length; from += batch) {
    const some = selections.slice(from, from + batch);
    const grids = await gridSelections(request, some, gridded.grid.index);
    grids.forEach(({ grid, lost }, i) => {
      visit(from + i, grid.cells(), lost);
    });
  }
}

/** In the order of the selections. */
export async function costsOf(
  image: GriddedImage,
  selections: readonly Selection[],
): Promise<SelectionCost[]> {
  if (selections.length === 0) return [];
  const { maker, plan, gridded } = image;
  const weighting = plan.weighting.value;
  const { cells: few, beam: before } = wholeOf(image);
  const all = sumOf(few.weight, few.count);
  const gapBefore = largestGap(gridded.coverage, plan);
  const costs: SelectionCost[] = [];
  await eachSelection(image, selections, (index, taken, lost) => {
    const left = cellsWithout(few, taken);
    const kept = sumOf(left.weight, left.count);
    const after = maker.make(left, weighting);
    const gapAfter = largestGap(gridded.coverage.without(lost), plan);
    costs[index] = {
      sensitivityLossFraction: all > 0 ? 1 - Math.sqrt(kept / all) : Number.NaN,
      ...beamChange(before, after),
      largestGapChangeFraction: gapAfter / gapBefore - 1,
    };
  });
  return costs;
}

function sumOf(values: Float64Array, count: number): number {
  let sum = 0;
  for (let i = 0; i < count; i++) sum += values[i]!;
  return sum;
}

function beamChange(
  before: MadeBeam,
  after: MadeBeam,
): Omit<SelectionCost, "sensitivityLossFraction" | "largestGapChangeFraction"> {
  return {
    beamMajorChangeFraction: after.ellipse.major / before.ellipse.major - 1,
    beamMinorChangeFraction: after.ellipse.minor / before.ellipse.minor - 1,
    peakSidelobeChangeFraction: Math.abs(after.sidelobes.peak) / Math.abs(before.sidelobes.peak) - 1,
  };
}

function largestGap(tally: CoverageTally, plan: Plan): number {
  const { from, to } = plannedSpacings(plan);
  const least = 1 / plan.fieldOfView.value;
  const ratio = (gap: RadialGap) => {
    const inner = Math.max(gap.from, from);
    const outer = Math.min(gap.to, to);
    return outer - inner > least ? outer / inner : 1;
  };
  // Both sides are measured from bin to bin, so that nothing but the samples makes a difference.
  return Math.max(1, ...tally.binned().radialGaps(least).map(ratio));
}
