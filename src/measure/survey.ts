/** The surveying pass: read the dataset once in blocks and fill the measures. */
import type { Dataset } from "../dataset/dataset.ts";
import { moduleBeside, shareOut, type Workers } from "../util/workers.ts";
import { finishSurvey } from "./finish-survey.ts";
import { DEFAULT_MEMORY, surveyMemory, surveyThreads } from "./memory.ts";
import { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";
import { SurveyPart } from "./survey-part.ts";
import type { Survey } from "./survey-result.ts";
import { type SurveyRowsOptions, surveyPart } from "./survey-rows.ts";
import type { SurveyTask } from "./survey-task.ts";

export { joinParts, surveyPart } from "./survey-rows.ts";

export interface SurveyOptions extends SurveyRowsOptions {
  /** threads that share the rows; none: this one reads them all. The result is the same. */
  readonly workers?: Workers | undefined;
}

/** @throws InputError where the dataset turns out to be malformed */
export async function surveyDataset(dataset: Dataset, options: SurveyOptions = {}): Promise<Survey> {
  return finishSurvey(await surveyShared(dataset, options));
}

/** The state of a survey of some rows, which the workers share out between them. */
export async function surveyShared(dataset: Dataset, options: SurveyOptions = {}): Promise<SurveyPart> {
  const { workers, memory, blockRows, onProgress } = options;
  const { recipe } = dataset;
  const [first, end] = options.rows ?? [0, dataset.rows];
  const most = surveyThreads(dataset, memory ?? surveyMemory(DEFAULT_MEMORY));
  const ranges = shareOut(end - first, Math.min(workers?.jobs ?? 1, most));
  if (workers === undefined || recipe === undefined || ranges.length < 2) return surveyPart(dataset, options);
  const tasks = ranges.map(([from, to]): SurveyTask => {
    return { recipe, rows: [first + from, first + to], memory, blockRows };
  });
  const states: (StateRecord | undefined)[] = await workers.run<SurveyTask, StateRecord>(
    moduleBeside("./survey-task", import.meta.url),
    tasks,
    onProgress && ((done) => onProgress(done, end - first)),
  );
  const all = SurveyPart.from(new StateReader(states[0]!), dataset, memory);
  for (let i = 1; i < states.length; i++) {
    all.merge(SurveyPart.from(new StateReader(states[i]!), dataset, memory));
    // What has been merged need not wait for the rest.
    states[i] = undefined;
  }
  return all;
}
