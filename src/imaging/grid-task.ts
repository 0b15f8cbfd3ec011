/** A pass that fills uv grids over a range of rows, in a thread of its own. */
import { type DatasetRecipe, reopen } from "../dataset/recipe.ts";
import type { Answer, Report } from "../util/workers.ts";
import { type GridSampling, type GridSource, gridDataset, gridSelections, sumsOf } from "./grid-dataset.ts";
import { errorGrids } from "./grid-errors.ts";
import type { GridSums, GridWork, SumsState } from "./grid-share.ts";
import { CellIndex } from "./moment-grid.ts";

export interface GridTask extends Pick<GridSource, "variance" | "form" | "coverageForm"> {
  readonly recipe: DatasetRecipe;
  readonly sampling: Omit<GridSampling, "survey"> & {
    readonly survey: Pick<GridSampling["survey"], "baselines" | "totals" | "others">;
  };
  readonly rows: readonly [number, number];
  readonly work: GridWork;
}

export async function run(task: GridTask, report: Report): Promise<Answer<SumsState>> {
  const { recipe, sampling, rows, work, ...rest } = task;
  const dataset = await reopen(recipe);
  const source: GridSource = {
    ...rest,
    rows,
    sampling: { ...sampling, survey: { ...sampling.survey, dataset } },
    onProgress: (share) => report(share * (rows[1] - rows[0])),
  };
  const { grids, tallies } = await sumsOfWork(source, work);
  const cellsOf = new Map(grids.map(({ index }) => [index, index.cellOf()]));
  const states = grids.map((grid) => grid.state(cellsOf.get(grid.index)!));
  return {
    result: { grids: states, tallies: tallies.map((tally) => tally.state()) },
    transfer: states.flatMap(({ cells, sums }) => [cells.buffer, sums.buffer]),
  };
}

async function sumsOfWork(source: GridSource, work: GridWork): Promise<GridSums> {
  if (work.kind === "all") return sumsOf(await gridDataset(source));
  const index = new CellIndex(source.form.half);
  if (work.kind === "errors") {
    const signed = await errorGrids(source, work.selections, index);
    return { grids: signed.flatMap(({ ahead, behind }) => [ahead, behind]), tallies: [] };
  }
  const selected = await gridSelections(source, work.selections, index);
  return { grids: selected.map(({ grid }) => grid), tallies: selected.map(({ lost }) => lost) };
}
