/** Trends in words. */
import { formatFrequency, formatNumber, formatPercent } from "../util/units.ts";
import type { Alarm, RecurringInterference, Trend } from "./trends.ts";

/** "antenna A07: the amplitude falls by 1.02 % a night since 2026-03-04". */
export function alarmText({ series, measure }: Trend, alarm: Alarm): string {
  const { change, since, before } = alarm;
  const rising = change.size > 0;
  const size = sizeText(Math.abs(change.size), measure.logarithmic);
  const item = series.kind === "rule" ? `rule ${series.item}` : `${kindWord(series.kind)} ${series.item}`;
  return change.kind === "drift"
    ? `${item}: the ${measure.title} ${rising ? "rises" : "falls"} by ${size} a night since ${since}`
    : `${item}: the ${measure.title} ${rising ? "rose" : "fell"} by ${size} between ${before} and ${since}`;
}

function kindWord(kind: string): string {
  return kind === "baseline group" ? "baselines of" : kind;
}

function sizeText(size: number, logarithmic: boolean): string {
  return logarithmic ? formatPercent(Math.expm1(size)) : formatNumber(size);
}

/** "1.3945 to 1.3965 GHz has interference from 10:00 to 11:30 UTC on 9 of 10 nights". */
export function recurrenceText({ low, high, recurrence }: RecurringInterference): string {
  const { clock, from, to, nights, observed } = recurrence;
  const zone = clock === "utc" ? "UTC" : "sidereal time at Greenwich";
  return `${formatFrequency(low, 6)} to ${formatFrequency(high, 6)} has interference from ${hourText(from)} to ${hourText(to)} ${zone} on ${nights} of the ${observed} nights that observed then`;
}

function hourText(hours: number): string {
  const minutes = Math.round(hours * 60);
  return `${String(Math.floor(minutes / 60) % 24).padStart(2, "0")}:${String(minutes % 60).padStart(2, "0")}`;
}
