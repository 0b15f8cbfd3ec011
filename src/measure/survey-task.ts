/** The surveying pass over a range of rows in a thread of its own. */
import { type DatasetRecipe, reopen } from "../dataset/recipe.ts";
import type { Answer, Report } from "../util/workers.ts";
import { buffersOf, type StateRecord } from "./state/value.ts";
import { surveyPart } from "./survey-rows.ts";

export interface SurveyTask {
  readonly recipe: DatasetRecipe;
  readonly rows: readonly [number, number];
  readonly memory: number | undefined;
  readonly blockRows: number | undefined;
}

export async function run(task: SurveyTask, report: Report): Promise<Answer<StateRecord>> {
  const { recipe, rows, memory, blockRows } = task;
  const dataset = await reopen(recipe);
  const part = await surveyPart(dataset, {
    rows,
    ...(memory === undefined ? {} : { memory }),
    ...(blockRows === undefined ? {} : { blockRows }),
    onProgress: report,
  });
  const state = part.state();
  return { result: state, transfer: buffersOf(state) };
}
