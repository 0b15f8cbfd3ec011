/**
 * Trends in a history: series that drift or that have taken a step, told from noise by control charts, and interference
 * that comes at the same hour. All charts together promise one false alarm in so many nights.
 */
import { mjdFromDate } from "../util/dates.ts";
import { type Change, changeOf } from "./charts/change.ts";
import { type ChartLimits, chartOf, firstAlarm, limitsFor } from "./charts/control-charts.ts";
import { type Recurrence, recurrenceOf, type Stretch } from "./charts/hours.ts";
import { sequentialNormalScores } from "./charts/normal-scores.ts";
import type { CheckRow } from "./history/records.ts";
import type { SeenInterference, Series } from "./history/store.ts";
import { type TrendMeasure, trendMeasure } from "./measures.ts";

/** Nights to a false alarm of all charts together: as rare as 3 sigma on one chart of single nights. */
export const NIGHTS_TO_FALSE_ALARM = 370;
/** Nights before a chart can say anything. */
const LEAST_NIGHTS = 8;

/** What a chart found, once it gave alarm. */
export interface Alarm {
  /** night of the alarm */
  readonly called: string;
  /** last night as before, first night changed */
  readonly before: string;
  readonly since: string;
  readonly change: Change;
}

export interface Trend {
  readonly series: Series;
  readonly measure: TrendMeasure;
  /** in order of time; after each the chart begins anew */
  readonly alarms: readonly Alarm[];
}

export interface RecurringInterference {
  readonly band: string;
  /** Hz */
  readonly low: number;
  readonly high: number;
  readonly recurrence: Recurrence;
}

export interface Trends {
  /** of every series with alarms or long enough to have some */
  readonly followed: readonly Trend[];
  readonly limits: ChartLimits;
  readonly recurring: readonly RecurringInterference[];
}

export function trendsOf(
  series: readonly Series[],
  interference: readonly SeenInterference[],
  checks: readonly CheckRow[],
): Trends {
  const long = series.filter(({ values }) => values.length >= LEAST_NIGHTS);
  const limits = limitsFor(NIGHTS_TO_FALSE_ALARM * Math.max(1, long.length));
  const followed = long.flatMap((one) => {
    const measure = trendMeasure(one.kind, one.measure);
    return measure === undefined ? [] : [{ series: one, measure, alarms: alarmsOf(one, measure, limits) }];
  });
  return { followed, limits, recurring: recurringIn(interference, checks) };
}

/** The alarms of a series, the chart starting anew after each change. */
export function alarmsOf(series: Series, measure: TrendMeasure, limits: ChartLimits): Alarm[] {
  const days = Float64Array.from(series.nights, (night) => mjdFromDate(night));
  const alarms: Alarm[] = [];
  let begin = 0;
  while (series.values.length - begin >= LEAST_NIGHTS) {
    const values = series.values.subarray(begin);
    const alarm = firstAlarm(chartOf(sequentialNormalScores(values)), limits);
    if (alarm === null) break;
    // A few nights after the alarm tell a drift from a step.
    const upTo = Math.min(values.length, Math.max(alarm.at + 1, LEAST_NIGHTS));
    const change = changeOf(days.subarray(begin, begin + upTo), values.subarray(0, upTo));
    const moved =
      change.kind === "step"
        ? change.size
        : change.size * (days[begin + upTo - 1]! - days[begin + change.from - 1]!);
    if (Math.abs(moved) >= measure.least) {
      const called = series.nights[begin + alarm.at]!;
      const since = series.nights[begin + change.from]!;
      const last = alarms.at(-1);
      // A drift that goes on is the same one.
      if (change.kind === "drift" && last?.change.kind === "drift" && change.size * last.change.size > 0) {
        alarms[alarms.length - 1] = { ...last, change };
      } else alarms.push({ called, before: series.nights[begin + change.from - 1]!, since, change });
    }
    // After a step the new level counts; a drift goes on, and is called again when it has gone as far again.
    begin += Math.max(1, change.kind === "step" ? change.from : alarm.at);
  }
  return alarms;
}

/** Stretches of frequency that have interference at the same hour, neighbours with the same hours joined. */
function recurringIn(
  interference: readonly SeenInterference[],
  checks: readonly CheckRow[],
): RecurringInterference[] {
  const judged = checks.filter((check) => check.error === null);
  const found: RecurringInterference[] = [];
  for (const band of new Set(interference.map((seen) => seen.band))) {
    const own = interference.filter((seen) => seen.band === band);
    const watched: Stretch[] = judged
      .filter((check) => check.band === band)
      .map(({ night, start, end }) => ({ night, start, end }));
    const edges = [...new Set(own.flatMap(({ low, high }) => [low, high]))].sort((a, b) => a - b);
    for (let i = 0; i + 1 < edges.length; i++) {
      const [low, high] = [edges[i]!, edges[i + 1]!];
      const seen = own.filter((one) => one.low < high && one.high > low);
      const recurrence = recurrenceOf(seen, watched);
      if (recurrence === null) continue;
      const last = found.at(-1);
      if (last?.band === band && last.high === low && sameHours(last.recurrence, recurrence)) {
        found[found.length - 1] = { ...last, high };
      } else found.push({ band, low, high, recurrence });
    }
  }
  return found;
}

function sameHours(a: Recurrence, b: Recurrence): boolean {
  return a.clock === b.clock && a.from === b.from && a.to === b.to;
}
