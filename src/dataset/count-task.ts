/** What selections hold of a range of rows, counted in a thread of its own. */
import type { Answer, Report } from "../util/workers.ts";
import { type TallySums, tallyRows } from "./count-selections.ts";
import { type DatasetRecipe, reopen } from "./recipe.ts";
import type { Selection } from "./selection.ts";

export interface CountTask {
  readonly recipe: DatasetRecipe;
  readonly selections: readonly Selection[];
  readonly quantum: number;
  readonly rows: readonly [number, number];
}

export async function run(task: CountTask, report: Report): Promise<Answer<TallySums>> {
  const dataset = await reopen(task.recipe);
  return { result: await tallyRows(dataset, task.selections, task.quantum, task.rows, report) };
}
