/** The index page: nights and datasets at a glance, alarms of the trends, and a filter. One file that needs no network. */
import { createHash } from "node:crypto";
import { verdictIcon } from "../../report/page/icons.ts";
import { html, Markup } from "../../report/page/markup.ts";
import { section } from "../../report/page/parts.ts";
import { STYLE } from "../../report/page/style.ts";
import { tool } from "../../report/tool.ts";
import { VERDICT_NAME } from "../../report/words.ts";
import { formatCount, formatNumber } from "../../util/units.ts";
import { CUSUM_ALLOWANCE, EWMA_WEIGHT } from "../charts/control-charts.ts";
import type { CheckRow } from "../history/records.ts";
import type { SeenInterference } from "../history/store.ts";
import { summaryLine, verdictOf } from "../summary.ts";
import { NIGHTS_TO_FALSE_ALARM, type Trend, type Trends } from "../trends.ts";
import { alarmText, recurrenceText } from "../words.ts";
import { hoursChart, trendChart } from "./charts.ts";
import { filterForm, MOST_SHOWN, nightsList } from "./nights.ts";
import { FILTER_SCRIPT } from "./script.ts";
import { NIGHTS_STYLE } from "./style.ts";

export interface IndexContent {
  readonly summary: string;
  /** in order of their nights */
  readonly checks: readonly CheckRow[];
  readonly trends: Trends;
  readonly interference: readonly SeenInterference[];
}

/** Plots of trends, those of the latest alarms. */
const MOST_CHARTS = 24;
const MOST_HOURS = 12;

const SCRIPT_HASH = createHash("sha256").update(FILTER_SCRIPT).digest("base64");
const POLICY = `default-src 'none'; style-src 'unsafe-inline'; script-src 'sha256-${SCRIPT_HASH}'; base-uri 'none'; form-action 'none'`;

export function indexPage(content: IndexContent): string {
  const { checks, trends, interference } = content;
  const { name, version } = tool();
  const contents = [
    ["last", "Last night"],
    ["alarms", "Alarms"],
    ["nights", "Nights"],
    ["trends", "Trends"],
    ["hours", "Same hour"],
  ] as const;
  return html`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${POLICY}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="referrer" content="no-referrer">
<meta name="color-scheme" content="light dark">
<title>visvet nights</title>
<style>${new Markup(STYLE + NIGHTS_STYLE)}</style>
</head>
<body>
<a class="skip" href="#main">Skip to the last night</a>
<div class="sheet">
<header class="top">
<p class="mark">visvet nights</p>
<nav aria-label="Contents"><ul>${contents.map(([id, title]) => html`<li><a href="#${id}">${title}</a></li>`)}</ul></nav>
</header>
<main id="main">
${lastNight(content)}
${section("alarms", "Alarms", alarmList(trends))}
${section(
  "nights",
  "Nights and datasets",
  html`${filterForm(checks)}${nightsList(checks)}${
    checks.length > MOST_SHOWN &&
    html`<p class="small muted">The newest ${formatCount(MOST_SHOWN)} of ${formatCount(checks.length)} checks; the history holds the others.</p>`
  }`,
)}
${section("trends", "Trends", trendFigures(trends))}
${section("hours", "Interference at the same hour", hourFigures(trends, interference))}
</main>
<footer><p>Written by ${name} ${version}. Nights are the UTC dates on which observations began. Flags are proposals; no dataset has been changed.</p></footer>
</div>
<script>${new Markup(FILTER_SCRIPT)}</script>
</body>
</html>
`.text;
}

function lastNight({ checks, summary }: IndexContent): Markup {
  const night = checks.at(-1)?.night;
  if (night === undefined) {
    return html`<section class="verdict" aria-labelledby="last"><h1 id="last">No night yet</h1><p class="advice">No dataset has been judged.</p></section>`;
  }
  const own = checks.filter((check) => check.night === night);
  const count = (verdict: string) => own.filter((check) => verdictOf(check) === verdict).length;
  const worst = (["hold", "caution", "ready"] as const).find((verdict) => count(verdict) > 0) ?? "hold";
  const failed = count("unreadable");
  return html`<section class="verdict ${worst}" aria-labelledby="last">
<h1 id="last">The last night, ${night}</h1>
<div class="counts">${(["hold", "caution", "ready"] as const).map(
    (verdict) =>
      html`<div class="${verdict}">${verdictIcon(verdict)}<strong>${count(verdict)}</strong> ${VERDICT_NAME[verdict].toLowerCase()}</div>`,
  )}${failed > 0 && html`<div><strong>${failed}</strong> not judged</div>`}</div>
<p class="muted">${summary}</p>
</section>`;
}

/** Alarms, the latest first. */
function alarmsOf({ followed }: Trends): { trend: Trend; text: string; called: string }[] {
  return followed
    .flatMap((trend) =>
      trend.alarms.map((alarm) => ({ trend, text: alarmText(trend, alarm), called: alarm.called })),
    )
    .sort((a, b) => (a.called === b.called ? 0 : a.called < b.called ? 1 : -1));
}

function alarmList(trends: Trends): Markup {
  const alarms = alarmsOf(trends);
  const { followed, limits } = trends;
  return html`${
    alarms.length === 0
      ? html`<p>No series of nights has drifted or taken a step.</p>`
      : html`<ul class="alarms">${alarms.map(({ text, called }) => html`<li>${text}<span class="small muted"> (called on ${called})</span></li>\n`)}</ul>`
  }<p class="small muted">${formatCount(followed.length)} series are followed, each by a CUSUM (allowance ${CUSUM_ALLOWANCE}, limit ${formatNumber(limits.cusum)}) and an EWMA (weight ${EWMA_WEIGHT}, limit ${formatNumber(limits.ewma)} standard deviations) of its ranks. Where nothing changes they give, all together, one false alarm in ${NIGHTS_TO_FALSE_ALARM} nights; values that wander from night to night give more.</p>`;
}

function trendFigures(trends: Trends): Markup {
  const latest = [...new Set(alarmsOf(trends).map(({ trend }) => trend))];
  if (latest.length === 0) return html`<p>Nothing to plot: there is no alarm.</p>`;
  return html`<div class="plots">${latest.slice(0, MOST_CHARTS).map((trend, i) => {
    const { series, measure, alarms } = trend;
    return html`<figure><h3>${series.item}: ${measure.title}</h3>${new Markup(trendChart(`trend-${i + 1}`, trend))}
<figcaption>${alarms.map((alarm) => `${alarmText(trend, alarm)}.`).join(" ")} ${series.band}. Dots: nights as before; rings: since the change; dashed: the night of the alarm.</figcaption></figure>\n`;
  })}</div>${latest.length > MOST_CHARTS && html`<p class="small muted">${latest.length - MOST_CHARTS} more series have alarms, listed above.</p>`}`;
}

function hourFigures({ recurring }: Trends, interference: readonly SeenInterference[]): Markup {
  if (recurring.length === 0)
    return html`<p>No stretch of the band has interference that comes at the same hour.</p>`;
  return html`<div class="plots">${recurring.slice(0, MOST_HOURS).map(
    (
      one,
      i,
    ) => html`<figure><h3>${recurrenceText(one).split(" has ")[0]!}</h3>${new Markup(hoursChart(`hours-${i + 1}`, one, interference))}
<figcaption>${recurrenceText(one)}. Bars: when each night had it; shaded: the hours at which it recurs.</figcaption></figure>\n`,
  )}</div>${recurring.length > MOST_HOURS && html`<p class="small muted">${recurring.length - MOST_HOURS} more stretches recur.</p>`}`;
}

export function indexContent(
  summary: Parameters<typeof summaryLine>[0],
  interference: readonly SeenInterference[],
): IndexContent {
  return { summary: summaryLine(summary), checks: summary.checks, trends: summary.trends, interference };
}
