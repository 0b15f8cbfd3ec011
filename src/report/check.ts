/**
 * One check of one dataset: survey, detect, forecast, judge, suggest flags, and look again with them applied. The order of
 * the stages is here and nowhere else; no stage knows the next.
 */
import type { Dataset } from "../dataset/dataset.ts";
import { flaggedView } from "../dataset/flagged-view.ts";
import type { PlanRequest } from "../dataset/plan-request.ts";
import { detect } from "../detect/detect.ts";
import type { DetectedEvent } from "../detect/event.ts";
import { eventMeasures } from "../detect/event-table.ts";
import type { FlagEntry } from "../flags/entry.ts";
import { payingFlags } from "../flags/pays.ts";
import { reconcile } from "../flags/reconcile.ts";
import { lossTogether, suggestFlags, withCosts } from "../flags/suggest.ts";
import { derivePlan } from "../imaging/derive-plan.ts";
import { type Forecast, forecast, forecastAfter } from "../imaging/forecast.ts";
import type { Plan } from "../imaging/plan.ts";
import { surveyDataset } from "../measure/survey.ts";
import type { Survey } from "../measure/survey-result.ts";
import type { Measures } from "../measure/table.ts";
import type { Judged } from "../rules/hit.ts";
import { judge } from "../rules/judge.ts";
import type { RuleSet } from "../rules/rule.ts";
import { blindSpots } from "./blind-spots.ts";
import type { Check } from "./report.ts";

export interface CheckRequest {
  readonly plan: PlanRequest;
  readonly rules: RuleSet;
  /** told the stage at hand and the share of it that is done, 0..1 */
  readonly onStage?: (stage: string, share: number) => void;
}

/** What one look at the data gives, as they are or with flags applied. */
interface Look {
  readonly survey: Survey;
  readonly events: readonly DetectedEvent[];
  readonly plan: Plan;
  readonly forecast: Forecast;
  readonly measures: Measures;
  readonly judged: Judged;
}

/** @throws InputError where the dataset turns out to be malformed */
export async function checkDataset(dataset: Dataset, request: CheckRequest): Promise<Check> {
  const { rules } = request;
  const first = await look(dataset, request, null, "");
  const { survey, events, plan, judged } = first;
  request.onStage?.("Weighing flags", 0);
  const suggestion = await suggestFlags({ dataset, times: survey.times, events, judged, rules });
  const again = (flags: readonly FlagEntry[]) =>
    flags.length === 0 ? first : look(flaggedView(dataset, flags), request, plan, ", flags applied");
  let second = await again(suggestion.flags);
  const paying = payingFlags(suggestion.flags, judged, second.judged);
  if (paying.doubts.length > 0) second = await again(paying.flags);
  const flags = withCosts(paying.flags, await first.forecast.costs(paying.flags));
  const { findings, verdict } = reconcile(judged, second.judged, flags);
  return {
    dataset,
    plan,
    survey,
    events,
    measures: first.measures,
    before: judged,
    after: second.judged,
    findings,
    flags,
    sensitivityLossFraction: flags.length === 0 ? 0 : await lossTogether(dataset, flags),
    doubts: [...suggestion.doubts, ...paying.doubts],
    image:
      second === first ? first.forecast.image : forecastAfter(first.forecast.image, second.forecast.image),
    beamPicture: first.forecast.picture,
    verdict,
    rulesFrom: rules.rules.map(({ id, from }) => ({ id, from })),
    blindSpots: blindSpots(survey, plan),
  };
}

/**
 * @param settled the plan of an earlier look, so that dropping samples does not move the goal; null: derive it
 * @param suffix  of the stages' names
 */
async function look(
  dataset: Dataset,
  request: CheckRequest,
  settled: Plan | null,
  suffix: string,
): Promise<Look> {
  const tell = (stage: string) => (share: number) => request.onStage?.(stage + suffix, share);
  const byRows = (stage: string) => {
    const told = tell(stage);
    return (rows: number, of: number) => told(of === 0 ? 1 : rows / of);
  };
  const survey = await surveyDataset(dataset, { onProgress: byRows("Surveying") });
  const plan = settled ?? derivePlan(request.plan, survey);
  const { purpose, lineChannels } = plan;
  const events = await detect(survey, {
    purpose: purpose.value,
    lineChannels: lineChannels.value,
    onProgress: byRows("Looking for faults"),
  });
  const forecasted = await forecast(survey, plan, { events, onProgress: tell("Forecasting the image") });
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
