/** The nights, newest first: of each dataset the verdict by shape and word, the score and what it suffers from most. */
import { verdictIcon } from "../../report/page/icons.ts";
import { html, Markup } from "../../report/page/markup.ts";
import { VERDICT_NAME } from "../../report/words.ts";
import type { CheckRow } from "../history/records.ts";
import { type NightlyVerdict, verdictOf } from "../summary.ts";

/** Datasets that the page shows, the newest. */
export const MOST_SHOWN = 3000;

export function filterForm(checks: readonly CheckRow[]): Markup {
  const findings = checks.flatMap((check) => (check.error === null ? check.findings : []));
  const antennas = distinct(findings.flatMap(({ antennas: names }) => names));
  const causes = new Map(findings.map(({ rule, title }) => [rule, title]));
  const option = (value: string, text: string) => html`<option value="${value}">${text}</option>`;
  return html`<form class="filters" id="filters" hidden>
<label>Antenna<select name="antenna">${option("", "any")}${antennas.map((name) => option(name, name))}</select></label>
<label>Cause<select name="cause">${option("", "any")}${[...causes]
    .sort(([, a], [, b]) => (a < b ? -1 : 1))
    .map(([rule, title]) => option(rule, title))}</select></label>
<label>Verdict<select name="verdict">${option("", "any")}${(["hold", "caution", "ready"] as const).map(
    (verdict) => option(verdict, VERDICT_NAME[verdict]),
  )}${option("unreadable", "not judged")}</select></label>
<label>From night<input type="date" name="from"></label>
<label>To night<input type="date" name="to"></label>
<button type="reset">Show all</button>
<p class="small muted" id="shown" role="status"></p>
</form>`;
}

function distinct(names: readonly string[]): string[] {
  return [...new Set(names)].sort((a, b) => a.localeCompare(b, "en", { numeric: true }));
}

export function nightsList(checks: readonly CheckRow[]): Markup {
  const byNight = new Map<string, CheckRow[]>();
  for (const check of checks.slice(-MOST_SHOWN)) {
    const own = byNight.get(check.night) ?? [];
    if (own.length === 0) byNight.set(check.night, own);
    own.push(check);
  }
  const nights = [...byNight].reverse();
  return html`<ol class="nights">${nights.map(
    ([
      night,
      own,
    ]) => html`<li class="night"><h3>${night}<small>${own.length} dataset${own.length === 1 ? "" : "s"}</small></h3>
<ul class="tiles">${worstFirst(own).map(tile)}</ul></li>\n`,
  )}</ol>`;
}

const ORDER: readonly NightlyVerdict[] = ["unreadable", "hold", "caution", "ready"];

/** Those alike in the order of their time. */
function worstFirst(checks: readonly CheckRow[]): CheckRow[] {
  return [...checks].sort((a, b) => ORDER.indexOf(verdictOf(a)) - ORDER.indexOf(verdictOf(b)));
}

function tile(check: CheckRow): Markup {
  const verdict = verdictOf(check);
  const findings = check.error === null ? check.findings : [];
  const antennas = JSON.stringify([...new Set(findings.flatMap(({ antennas: names }) => names))]);
  const rules = JSON.stringify([...new Set(findings.map(({ rule }) => rule))]);
  const data = html`class="tile ${verdict}" data-night="${check.night}" data-antennas="${antennas}" data-rules="${rules}"`;
  if (check.error !== null) {
    return html`<li ${data}><div>${UNREADABLE}<span class="tile-name" title="${check.path}">${check.name}</span><span></span>
<span class="tile-verdict">not judged</span><span class="tile-cause">${check.error}</span></div></li>\n`;
  }
  const score = Math.round(check.score);
  return html`<li ${data}><a href="${linkOf(check.report)}">${verdictIcon(check.verdict)}<span class="tile-name" title="${check.path}">${check.name}</span>
<span class="tile-score"><span class="unseen">score </span>${score}</span>
<span class="tile-verdict">${VERDICT_NAME[check.verdict]}</span>${check.cause !== null && html`<span class="tile-cause">${check.cause}</span>`}</a></li>\n`;
}

/** A path below the page as a link. */
function linkOf(report: string): string {
  return `${report.split("/").map(encodeURIComponent).join("/")}/report.html`;
}

/** A crossed-out square: a shape that none of the verdicts has. */
const UNREADABLE = new Markup(
  '<svg viewBox="0 0 24 24" aria-hidden="true" focusable="false"><path d="M2.5 2.5h19v19h-19z" fill="none" stroke="currentColor" stroke-width="3"/><path d="M6 18L18 6" stroke="currentColor" stroke-width="3"/></svg>',
);
