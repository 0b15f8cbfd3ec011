/** The plots of the index page: a series of nights with its alarms, and interference by the hour of the day. */
import { barX, dot, line, rect, ruleX } from "@observablehq/plot";
import { COLOUR, drawChart } from "../../report/plots/chart.ts";
import { mjdFromDate } from "../../util/dates.ts";
import type { SeenInterference } from "../history/store.ts";
import type { RecurringInterference, Trend } from "../trends.ts";
import { alarmText, recurrenceText } from "../words.ts";

const HEIGHT = 240;
/** Nights that are labelled on an axis. */
const MOST_LABELS = 12;

/** Nights as points, levels and drifts as lines, the night of each alarm as a rule. */
export function trendChart(id: string, trend: Trend): string {
  const { series, measure, alarms } = trend;
  const percent = measure.logarithmic;
  const shown = (value: number) => (percent ? 100 * Math.expm1(value) : value);
  const points = series.nights.map((night, i) => ({ night: dateOf(night), value: shown(series.values[i]!) }));
  const changed = alarms.at(-1)!;
  const since = dateOf(changed.since);
  return drawChart({
    id,
    label: alarms.map((alarm) => alarmText(trend, alarm)).join("; "),
    height: HEIGHT,
    x: { type: "utc", label: "night", labelArrow: "none", ticks: 5 },
    y: {
      label: percent ? `${measure.title}, % above the usual` : measure.title,
      labelArrow: "none",
      ticks: 5,
      grid: true,
      nice: true,
    },
    marks: [
      line(points, { x: "night", y: "value", stroke: COLOUR.faint, strokeWidth: 1.5 }),
      dot(
        points.filter(({ night }) => night < since),
        { x: "night", y: "value", r: 2.5, fill: COLOUR.kept },
      ),
      dot(
        points.filter(({ night }) => night >= since),
        { x: "night", y: "value", r: 3.2, stroke: COLOUR.suggested, strokeWidth: 2, fill: "var(--surface)" },
      ),
      ruleX(
        alarms.map(({ called }) => dateOf(called)),
        { stroke: COLOUR.limit, strokeWidth: 2, strokeDasharray: "6 4" },
      ),
    ],
  });
}

/** For each night a bar where the interference was; the hours it recurs at are shaded. */
export function hoursChart(
  id: string,
  recurring: RecurringInterference,
  seen: readonly SeenInterference[],
): string {
  const bars = seen
    .filter(({ band, low, high }) => band === recurring.band && low < recurring.high && high > recurring.low)
    .flatMap(({ night, start, end }) => hoursOf(start, end).map(([from, to]) => ({ night, from, to })));
  const { from, to } = recurring.recurrence;
  const shaded =
    from < to
      ? [[from, to]]
      : [
          [from, 24],
          [0, to],
        ];
  const nights = [...new Set(bars.map(({ night }) => night))].sort();
  return drawChart({
    id,
    label: recurrenceText(recurring),
    height: Math.min(360, 110 + 12 * nights.length),
    marginLeft: 86,
    x: { domain: [0, 24], label: "hour of the day, UTC", labelArrow: "none", ticks: 8, grid: true },
    y: {
      type: "band",
      domain: nights,
      label: null,
      padding: 0.25,
      ticks: nights.filter((_, i) => i % Math.ceil(nights.length / MOST_LABELS) === 0),
    },
    marks: [
      rect(recurring.recurrence.clock === "utc" ? shaded : [], {
        x1: "0",
        x2: "1",
        fill: COLOUR.limit,
        fillOpacity: 0.14,
      }),
      barX(bars, { x1: "from", x2: "to", y: "night", fill: COLOUR.suggested }),
    ],
  });
}

/** Stretches of a day in hours, cut at midnight. */
function hoursOf(start: number, end: number): [number, number][] {
  const from = (start - Math.floor(start)) * 24;
  const to = from + Math.min(24, (end - start) * 24);
  return to <= 24
    ? [[from, to]]
    : [
        [from, 24],
        [0, to - 24],
      ];
}

function dateOf(night: string): Date {
  return new Date((mjdFromDate(night) - 40587) * 86_400_000);
}
