/** The top of the page: the verdict, the score before and after the flags, what took it, and what was looked at. */
import { datasetFacts } from "../dataset-facts.ts";
import type { Check } from "../report.ts";
import { findingCounts, moreRules, pointsText, scoreText, VERDICT_NAME, verdictAdvice } from "../words.ts";
import { verdictIcon } from "./icons.ts";
import { html, Markup } from "./markup.ts";

/** Rules named with the points they took; the rest is in the numbers. */
const MOST_RULES = 6;

export function verdictSection(check: Check): Markup {
  const { verdict } = check;
  return html`
<section class="verdict ${verdict}" aria-labelledby="verdict">
<div class="verdict-grid">
<div>
<h1 id="verdict">${check.dataset.name}<span class="unseen">: ${VERDICT_NAME[verdict]}</span></h1>
<p class="verdict-word">${verdictIcon(verdict)}<span>${VERDICT_NAME[verdict]}</span></p>
<p class="advice">${verdictAdvice(check)}</p>
<p class="muted">Found: ${findingCounts(check.findings)}.</p>
</div>
<div>${scorePart(check)}</div>
</div>
<dl class="facts">
${datasetFacts(check.survey).map(({ label, value }) => html`<div><dt>${label}</dt><dd>${value}</dd></div>\n`)}</dl>
</section>`;
}

function scorePart(check: Check): Markup {
  const { before, after, flags } = check;
  const after_ = flags.length > 0;
  return html`<dl class="score-head">
<div><dt>Readiness score${after_ && " as it is"}</dt><dd>${scoreText(before.score)}<small> of 100</small></dd></div>
${after_ && html`<div><dt>with the suggested flags</dt><dd>${scoreText(after.score)}<small> of 100</small></dd></div>`}
</dl>
${scoreScale(before.score, after_ ? after.score : undefined)}
${takenList(check)}`;
}

/** A scale from 0 to 100: a full marker for the data as they are, an open one with the flags, and the hold limit. */
function scoreScale(before: number, after: number | undefined): Markup {
  const at = (score: number) =>
    Math.round(4 + 3.92 * Math.min(100, Math.max(0, Number.isFinite(score) ? score : 0)));
  const x = at(before);
  const arrow =
    after === undefined || Math.abs(at(after) - x) < 14
      ? ""
      : `<path d="M${x + (at(after) > x ? 9 : -9)} 12H${at(after) + (at(after) > x ? -9 : 9)}" stroke="var(--tone)" stroke-width="2"/>`;
  const open =
    after === undefined
      ? ""
      : `<circle cx="${at(after)}" cy="12" r="6.5" fill="var(--surface)" stroke="var(--tone)" stroke-width="2.5"/>`;
  const ticks = [0, 25, 50, 75, 100].map(
    (tick) =>
      `<path d="M${at(tick)} 22v6" stroke="var(--muted)"/><text x="${at(tick)}" y="41" text-anchor="${tick === 0 ? "start" : tick === 100 ? "end" : "middle"}">${tick}</text>`,
  );
  return new Markup(
    `<svg class="scale" viewBox="0 0 400 46" aria-hidden="true" focusable="false" font-size="12" fill="var(--muted)">` +
      `<path d="M4 22H396" stroke="var(--rule)" stroke-width="5"/><path d="M4 22H${at(50)}" stroke="var(--hold)" stroke-width="5" stroke-dasharray="2 3"/>` +
      `${ticks.join("")}${arrow}${open}<circle cx="${x}" cy="12" r="7.5" fill="var(--tone)"/></svg>`,
  );
}

function takenList(check: Check): Markup {
  const { taken } = check.before;
  if (taken.length === 0) return html`<p class="small muted">No rule took points.</p>`;
  const most = Math.max(...taken.map(({ points }) => points));
  const rest = taken.length - MOST_RULES;
  return html`<p class="small muted">Points that rules took</p>
<ul class="taken">${taken.slice(0, MOST_RULES).map(({ rule, points }) => {
    const width = Math.max(1, Math.round((100 * points) / Math.max(most, 1e-9)));
    return html`<li><span>${rule}</span><span aria-hidden="true"><span class="bar" style="width:${width}%"></span></span><span class="number">${pointsText(points)}</span></li>\n`;
  })}</ul>
${rest > 0 && html`<p class="small muted">${moreRules(rest)}</p>`}`;
}
