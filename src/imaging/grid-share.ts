/** The passes that fill uv grids, shared out among threads by rows. Sums and counts are exact: they add up to the same. */
import { type Selection, selectionAlone } from "../dataset/selection.ts";
import { sharedArray } from "../util/shared-array.ts";
import { moduleBeside, shareOut } from "../util/workers.ts";
import type { CoverageState, CoverageTally } from "./coverage-tally.ts";
import type { GridSource } from "./grid-dataset.ts";
import type { GridTask } from "./grid-task.ts";
import type { GridState, MomentGrid } from "./moment-grid.ts";

/** Which of the passes. */
export type GridWork =
  | { readonly kind: "all" }
  | { readonly kind: "selections" | "errors"; readonly selections: readonly Selection[] };

/** What a pass fills. */
export interface GridSums {
  readonly grids: readonly MomentGrid[];
  readonly tallies: readonly CoverageTally[];
}

/** What a thread sends back of it. */
export interface SumsState {
  readonly grids: readonly GridState[];
  readonly tallies: readonly CoverageState[];
}

/** @returns false, and nothing is filled, where there is but one thread: the caller's */
export async function fillShared(request: GridSource, work: GridWork, into: GridSums): Promise<boolean> {
  const { workers, sampling, form, coverageForm, onProgress } = request;
  const { dataset, baselines, totals, others } = sampling.survey;
  const { recipe, rows } = dataset;
  const ranges = shareOut(rows, workers?.jobs ?? 1);
  if (workers === undefined || recipe === undefined || ranges.length < 2) return false;
  const { field, products, everLongest } = sampling;
  const common = {
    recipe,
    sampling: { field, products, everLongest, survey: { baselines, totals, ...(others && { others }) } },
    variance: sharedArray(request.variance),
    form,
    coverageForm,
    work: work.kind === "all" ? work : { ...work, selections: work.selections.map(selectionAlone) },
  };
  const states = await workers.run<GridTask, SumsState>(
    moduleBeside("./grid-task", import.meta.url),
    ranges.map((range) => ({ ...common, rows: range })),
    onProgress && ((done) => onProgress(done / rows)),
  );
  for (const { grids, tallies } of states) {
    for (const [i, grid] of grids.entries()) into.grids[i]!.merge(grid);
    for (const [i, tally] of tallies.entries()) into.tallies[i]!.merge(tally);
  }
  return true;
}
