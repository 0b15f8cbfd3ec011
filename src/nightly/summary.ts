/** What a run found: one line for a mail, a text, and JSON for monitoring. */
import type { Verdict } from "../rules/finding.ts";
import { plainText } from "../util/terminal.ts";
import type { CheckRow } from "./history/records.ts";
import type { NightlyResult } from "./nightly.ts";
import type { Alarm, Trend } from "./trends.ts";
import { alarmText, recurrenceText } from "./words.ts";

export interface NewAlarm {
  readonly trend: Trend;
  readonly alarm: Alarm;
}

/** Alarms that a night of this run called. */
export function newAlarms({ news, trends }: NightlyResult): NewAlarm[] {
  const nights = new Set(news.map(({ night }) => night));
  return trends.followed.flatMap((trend) =>
    trend.alarms.filter(({ called }) => nights.has(called)).map((alarm) => ({ trend, alarm })),
  );
}

export type NightlyVerdict = Verdict | "unreadable";

/** The worst of this run; "ready" where it judged nothing. */
export function worstOf(news: readonly CheckRow[]): NightlyVerdict {
  const order: NightlyVerdict[] = ["unreadable", "hold", "caution", "ready"];
  return order.find((verdict) => news.some((check) => verdictOf(check) === verdict)) ?? "ready";
}

export function verdictOf(check: CheckRow): NightlyVerdict {
  return check.error === null ? check.verdict : "unreadable";
}

/** "visvet nightly: 10 datasets judged: 3 hold, 1 caution, 6 ready; 1 new alarm". */
export function summaryLine(result: NightlyResult): string {
  const { news, unchanged, unsettled } = result;
  const parts = (["unreadable", "hold", "caution", "ready"] as const).flatMap((verdict) => {
    const count = news.filter((check) => verdictOf(check) === verdict).length;
    return count === 0 ? [] : [`${count} ${verdict}`];
  });
  const judged = `${news.length} dataset${news.length === 1 ? "" : "s"} judged${parts.length === 0 ? "" : `: ${parts.join(", ")}`}`;
  const alarms = newAlarms(result).length;
  const rest = [
    alarms > 0 && `${alarms} new alarm${alarms === 1 ? "" : "s"}`,
    unchanged > 0 && `${unchanged} unchanged`,
    unsettled.length > 0 && `${unsettled.length} still being written`,
  ].filter((text) => text !== false);
  return `visvet nightly: ${[judged, ...rest].join("; ")}`;
}

const WIDEST_NAME = 28;

/** For a terminal or a mail; names are stripped of control characters. */
export function summaryText(result: NightlyResult): string {
  const { news, unsettled, trends } = result;
  const width = Math.min(WIDEST_NAME, Math.max(0, ...news.map(({ name }) => name.length)));
  const lines = [summaryLine(result), ""];
  const order: readonly NightlyVerdict[] = ["unreadable", "hold", "caution", "ready"];
  for (const verdict of order) {
    for (const check of news.filter((one) => verdictOf(one) === verdict)) {
      const score = check.error === null ? String(Math.round(check.score)).padStart(3) : "  -";
      const what = check.error ?? check.cause ?? "nothing found";
      lines.push(
        `  ${verdict.toUpperCase().padEnd(10)} ${score}  ${check.night}  ${plainText(check.name).padEnd(width)}  ${plainText(what)}`,
      );
    }
  }
  const alarms = newAlarms(result);
  if (alarms.length > 0) {
    lines.push("", "New alarms");
    for (const { trend, alarm } of alarms) lines.push(`  ${plainText(alarmText(trend, alarm))}`);
  }
  if (trends.recurring.length > 0) {
    lines.push("", "Interference at the same hour");
    for (const recurring of trends.recurring) lines.push(`  ${recurrenceText(recurring)}`);
  }
  if (unsettled.length > 0) {
    lines.push("", "Still being written, left for the next run");
    for (const path of unsettled) lines.push(`  ${plainText(path)}`);
  }
  return `${lines.join("\n")}\n`;
}

/** Stable keys, additions only within a version. */
export function summaryJson(result: NightlyResult): string {
  const { news, unchanged, unsettled, trends, beyond } = result;
  return `${JSON.stringify(
    {
      format: "visvet-nightly",
      version: 1,
      summary: summaryLine(result),
      worst: worstOf(news),
      datasets: news.map(datasetJson),
      unchanged,
      stillBeingWritten: unsettled,
      alarms: newAlarms(result).map(({ trend, alarm }) => ({
        band: trend.series.band,
        kind: trend.series.kind,
        item: trend.series.item,
        measure: trend.series.measure,
        called: alarm.called,
        before: alarm.before,
        since: alarm.since,
        change: alarm.change.kind,
        size: alarm.change.size,
        logarithmic: trend.measure.logarithmic,
        text: alarmText(trend, alarm),
      })),
      recurringInterference: trends.recurring.map((recurring) => ({
        ...recurring,
        text: recurrenceText(recurring),
      })),
      beyondRetention: beyond.map(({ night, name, path }) => ({ night, name, path })),
    },
    null,
    1,
  )}\n`;
}

function datasetJson(check: CheckRow) {
  const { name, path, night } = check;
  if (check.error !== null) return { name, path, night, verdict: "unreadable", error: check.error };
  const { verdict, score, scoreAfter, cause, report } = check;
  return { name, path, night, verdict, score, scoreAfter, cause, report: `${report}/report.html` };
}
