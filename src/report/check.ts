/**
 * One check of one dataset: a look at it, flags suggested from what it shows, and another look with them applied. The
 * order of the stages is here and in `look.ts` and nowhere else; no stage knows the next.
 */
import type { Dataset } from "../dataset/dataset.ts";
import { flaggedView } from "../dataset/flagged-view.ts";
import type { FlagEntry } from "../flags/entry.ts";
import { payingFlags } from "../flags/pays.ts";
import { reconcile } from "../flags/reconcile.ts";
import { lossTogether, suggestFlags, withCosts } from "../flags/suggest.ts";
import { forecastAfter } from "../imaging/forecast.ts";
import type { SurveyPart } from "../measure/survey-part.ts";
import { blindSpots } from "./blind-spots.ts";
import { judgeFields } from "./fields.ts";
import { type CheckRequest, look } from "./look.ts";
import type { Check } from "./report.ts";

export type { CheckRequest } from "./look.ts";

/**
 * @param surveyed the state of a survey of all the rows, where there is one already: saves the first pass
 * @throws InputError where the dataset turns out to be malformed
 */
export async function checkDataset(
  dataset: Dataset,
  request: CheckRequest,
  surveyed?: SurveyPart,
): Promise<Check> {
  const { rules, workers } = request;
  const first = await look(dataset, request, null, "", surveyed);
  const { survey, events, plan, judged } = first;
  request.onStage?.("Weighing flags", 0);
  const suggestion = await suggestFlags({
    dataset,
    times: survey.times,
    events,
    judged,
    rules,
    workers,
  });
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
    sensitivityLossFraction: flags.length === 0 ? 0 : await lossTogether(dataset, flags, workers),
    doubts: [...suggestion.doubts, ...paying.doubts],
    image:
      second === first ? first.forecast.image : forecastAfter(first.forecast.image, second.forecast.image),
    byField: await judgeFields(dataset, survey, flags, request),
    beamPicture: first.forecast.picture,
    verdict,
    rulesFrom: rules.rules.map(({ id, from }) => ({ id, from })),
    blindSpots: blindSpots(survey, plan),
  };
}
