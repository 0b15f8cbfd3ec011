/** The `gap_in_time` measure. */
import { SECONDS_PER_DAY } from "../../util/constants.ts";
import { median } from "../../util/statistics.ts";
import { fillMeasure } from "../fill-measure.ts";
import { GAP_IN_TIME } from "../forms.ts";
import type { BareSurvey } from "../survey-result.ts";
import type { Measure } from "../table.ts";
import { TIME_STEP_DAYS } from "../time-order.ts";
import { type Integrations, longestPause } from "../times.ts";

export interface Gap {
  /** MJD of the integration centres on either side */
  readonly start: number;
  readonly end: number;
  /** without data: what lies between them beyond one integration */
  readonly seconds: number;
}

/** Breaks in the time of the whole array, longer than five integrations and a minute. */
export function gapsOf({ centre }: Integrations, integration: number): Gap[] {
  const gaps: Gap[] = [];
  for (let i = 1; i < centre.length; i++) {
    const start = centre[i - 1]!;
    const end = centre[i]!;
    const between = (end - start) * SECONDS_PER_DAY;
    if (between <= longestPause(integration)) continue;
    gaps.push({ start, end, seconds: between - (integration || 0) });
  }
  return gaps;
}

export function gapMeasure(survey: BareSurvey, integrations: Integrations): Measure {
  const gaps = gapsOf(integrations, survey.integration);
  const typical = median(gaps.map(({ seconds }) => seconds));
  const { scans } = survey;
  const rows = gaps.map(({ start, end, seconds }) => {
    const before = scans.findLast((scan) => scan.end <= start + TIME_STEP_DAYS);
    const after = scans.find((scan) => scan.start >= end - TIME_STEP_DAYS);
    return {
      time_start: start,
      time_end: end,
      seconds,
      integrations: seconds / survey.integration,
      gap_ratio: seconds / typical,
      field_before: before?.field ?? null,
      field_after: after?.field ?? null,
      in_field: before !== undefined && before.field === after?.field ? 1 : 0,
    };
  });
  return fillMeasure(GAP_IN_TIME, rows);
}
