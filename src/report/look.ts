/** One look at a dataset, as it is or with flags applied: survey, detect, forecast, judge. */
import type { Dataset } from "../dataset/dataset.ts";
import type { PlanRequest } from "../dataset/plan-request.ts";
import { detect } from "../detect/detect.ts";
import type { DetectedEvent } from "../detect/event.ts";
import { eventMeasures } from "../detect/event-table.ts";
import { derivePlan } from "../imaging/derive-plan.ts";
import { type Forecast, forecast } from "../imaging/forecast.ts";
import type { Plan } from "../imaging/plan.ts";
import { finishSurvey } from "../measure/finish-survey.ts";
import { DEFAULT_MEMORY, surveyMemory } from "../measure/memory.ts";
import { surveyDataset } from "../measure/survey.ts";
import type { SurveyPart } from "../measure/survey-part.ts";
import type { Survey } from "../measure/survey-result.ts";
import type { Measures } from "../measure/table.ts";
import type { Judged } from "../rules/hit.ts";
import { judge } from "../rules/judge.ts";
import type { RuleSet } from "../rules/rule.ts";
import type { Workers } from "../util/workers.ts";

export interface CheckRequest {
  readonly plan: PlanRequest;
  readonly rules: RuleSet;
  /** told the stage at hand and the share of it that is done, 0..1 */
  readonly onStage?: (stage: string, share: number) => void;
  /** threads that share the passes over the samples; none: this one reads them. The result is the same. */
  readonly workers?: Workers | undefined;
  /** bytes that the program may take; default 1 GB */
  readonly memory?: number | undefined;
}

/** What one look at the data gives, as they are or with flags applied. */
export interface Look {
  readonly survey: Survey;
  readonly events: readonly DetectedEvent[];
  readonly plan: Plan;
  readonly forecast: Forecast;
  readonly measures: Measures;
  readonly judged: Judged;
}

/**
 * @throws InputError where the dataset turns out to be malformed
 * @param settled the plan of an earlier look, so that dropping samples does not move the goal; null: derive it
 * @param suffix  of the stages' names
 * @param surveyed the state of a survey of all its rows, where there is one already
 */
export async function look(
  dataset: Dataset,
  request: CheckRequest,
  settled: Plan | null,
  suffix: string,
  surveyed?: SurveyPart,
): Promise<Look> {
  const { workers } = request;
  const tell = (stage: string) => (share: number) => request.onStage?.(stage + suffix, share);
  const byRows = (stage: string) => {
    const told = tell(stage);
    return (rows: number, of: number) => told(of === 0 ? 1 : rows / of);
  };
  const survey =
    surveyed === undefined
      ? await surveyDataset(dataset, {
          workers,
          memory: surveyMemory(request.memory ?? DEFAULT_MEMORY),
          onProgress: byRows("Surveying"),
        })
      : finishSurvey(surveyed);
  const plan = settled ?? derivePlan(request.plan, survey);
  const { purpose, lineChannels } = plan;
  const events = await detect(survey, {
    purpose: purpose.value,
    lineChannels: lineChannels.value,
    workers,
    onProgress: byRows("Looking for faults"),
  });
  const forecasted = await forecast(survey, plan, {
    events,
    workers,
    onProgress: tell("Forecasting the image"),
  });
  const all = [...survey.measures.values(), ...eventMeasures(survey, events), ...forecasted.measures];
  const measures: Measures = new Map(all.map((measure) => [measure.name, measure]));
  return {
    survey,
    events,
    plan,
    forecast: forecasted,
    measures,
    judged: judge(request.rules, measures, plan),
  };
}
