/**
 * The uv cells of the samples that carry an error, and which way round it is there: a phase error of an antenna turns
 * sign between the baselines whose first antenna it is and those whose second, and again where a grid of half the plane
 * turns a sample into its conjugate.
 */
import type { Selection } from "../dataset/selection.ts";
import { compileSelections } from "../dataset/selection-matcher.ts";
import { eachRow, type GridSource, partOf } from "./grid-dataset.ts";
import { fillShared } from "./grid-share.ts";
import { type CellIndex, type FilledCells, MomentGrid, turned } from "./moment-grid.ts";
import { RowDeposit } from "./row-deposit.ts";
import { RowWeights } from "./row-weights.ts";

/** Of each cell the weight, and the mean and spread of its samples. */
const ORDER = 2;

/** The samples of a selection, by the sign of the phase error that the lower-numbered end of each baseline sees. */
export interface ErrorCells {
  readonly ahead: FilledCells;
  readonly behind: FilledCells;
}

/** Grid the samples of each selection, in one pass over the weights. */
export async function gridErrors(
  request: GridSource,
  selections: readonly Selection[],
  index: CellIndex,
): Promise<ErrorCells[]> {
  const grids = await errorGrids(request, selections, index);
  return grids.map(({ ahead, behind }) => ({ ahead: ahead.cells(), behind: behind.cells() }));
}

export async function errorGrids(
  request: GridSource,
  selections: readonly Selection[],
  index: CellIndex,
): Promise<SignedGrid[]> {
  const { sampling, variance } = request;
  const { dataset } = sampling.survey;
  const form = { ...request.form, order: ORDER };
  const grids = selections.map(
    () => new SignedGrid(new MomentGrid(form, index), new MomentGrid(form, index)),
  );
  const sums = { grids: grids.flatMap(({ ahead, behind }) => [ahead, behind]), tallies: [] };
  if (await fillShared(request, { kind: "errors", selections }, sums)) return grids;
  const signs = selections.map(signOf);
  const matcher = compileSelections(dataset, selections);
  const parts = matcher.runs.map((bounds) => partOf(dataset, bounds));
  const row = new RowWeights(dataset, sampling.products);
  const deposit = new RowDeposit(dataset, ORDER);
  await eachRow(request, (block, at, rowFrom, levelFrom) => {
    const count = matcher.matchRow(block, at);
    if (count === 0) return;
    deposit.place(block, at);
    for (let i = 0; i < count; i++) {
      const s = matcher.matched[i]!;
      const grid = grids[s]!;
      grid.sign = signs[s]!(block.antenna1[at]!, block.antenna2[at]!);
      row.fillPart(block.weight, rowFrom, variance, levelFrom, parts[s]!, 1);
      deposit.addTo(grid, row);
    }
  });
  return grids;
}

/** -1 where an antenna of the selection is the second of the row's, or where a baseline is stored the other way round. */
function signOf({ antennas }: Selection): (antenna1: number, antenna2: number) => 1 | -1 {
  if (antennas === null) return (antenna1, antenna2) => (antenna1 < antenna2 ? 1 : -1);
  const chosen = new Set(antennas);
  return (antenna1) => (chosen.has(antenna1) ? 1 : -1);
}

/** Two grids, between which samples are shared out by the sign of their error in the half of the plane that is kept. */
export class SignedGrid {
  readonly ahead: MomentGrid;
  readonly behind: MomentGrid;
  sign: 1 | -1 = 1;

  constructor(ahead: MomentGrid, behind: MomentGrid) {
    this.ahead = ahead;
    this.behind = behind;
  }

  get form() {
    return this.ahead.form;
  }

  add(u: number, v: number, weight: number, noise: number): void {
    const { field } = this.ahead.form;
    const ahead = this.sign === (turned(u * field, v * field) ? -1 : 1);
    (ahead ? this.ahead : this.behind).add(u, v, weight, noise);
  }
}
