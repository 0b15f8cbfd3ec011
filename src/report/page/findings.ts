/** The findings by severity, each a card: what, where, what it does to the image, how far beyond its limits, what to do. */

import type { Finding } from "../../rules/finding.ts";
import type { Check } from "../report.ts";
import type { ScopeWords } from "../scope.ts";
import { limitsText, sentence, toDo, upperFirst } from "../words.ts";
import { verdictTag } from "./icons.ts";
import { html, Markup } from "./markup.ts";
import { section } from "./parts.ts";

/** More findings within their limits than this are folded away. */
const MOST_WITHIN = 5;

export function findingsSection(check: Check, words: ScopeWords): Markup {
  const serious = check.findings.filter((finding) => finding.verdict !== "ready");
  const within = check.findings.filter((finding) => finding.verdict === "ready");
  return section(
    "findings",
    "Findings",
    html`${serious.length === 0 && html`<p>Nothing goes beyond its caution limit.</p>`}
${serious.map((finding, i) => card(finding, i + 1, words))}
${within.length > 0 && withinList(within, words)}`,
  );
}

function card(finding: Finding, number: number, words: ScopeWords): Markup {
  const id = `finding-${number}`;
  const { evidence: seen } = finding;
  const evidence =
    seen.length > 0 &&
    html`<dt>Evidence</dt><dd>${seen.map((text) => html`<p>${sentence(words.named(text))}</p>`)}</dd>`;
  return html`<article class="finding ${finding.verdict}" aria-labelledby="${id}">
<div class="finding-head">${verdictTag(finding.verdict)}<h3 id="${id}">${finding.title}</h3></div>
<p class="where">${upperFirst(words.scope(finding.scope))}</p>
<p class="in-image">${finding.consequence.text}</p>
<div class="finding-grid">
<dl class="pairs"><dt>To do</dt><dd><strong>${toDo(finding)}</strong></dd>${evidence}<dt>Limits from</dt><dd>${finding.limits.from}</dd><dt>Rule</dt><dd><span class="code">${finding.rule}</span>, severity ${finding.severity.toFixed(2)} of 1</dd></dl>
${gauge(finding)}
</div>
</article>`;
}

/** The measured value on a line with its two limits, a third of the line between them. */
function gauge(finding: Finding): Markup {
  const { caution, hold } = finding.limits;
  const { value } = finding.measured;
  const share = (value - caution) / (hold - caution);
  const known = Number.isFinite(share);
  const x = Math.round(100 + 100 * Math.min(1.9, Math.max(-0.9, share)));
  const marker = known
    ? `<path d="M${x} 15l-7 -12h14z" fill="var(--tone)" stroke="var(--surface)" stroke-width="1.5"/>`
    : "";
  const svg = new Markup(
    `<svg viewBox="0 0 300 24" aria-hidden="true" focusable="false"><path d="M2 19H100" stroke="var(--ready)" stroke-width="4"/>` +
      `<path d="M102 19H198" stroke="var(--caution)" stroke-width="4" stroke-dasharray="9 3"/>` +
      `<path d="M200 19H298" stroke="var(--hold)" stroke-width="4" stroke-dasharray="3 3"/>${marker}</svg>`,
  );
  return html`<div class="gauge"><p class="value">${limitsText(finding).measured}</p>${svg}
<p>${limitsText(finding).limits}</p></div>`;
}

function withinList(findings: readonly Finding[], words: ScopeWords): Markup {
  const list = html`<ul class="within ready">${findings.map((finding) => {
    const { measured, limits } = limitsText(finding);
    const where = Object.keys(finding.scope).length === 0 ? "" : ` (${words.scope(finding.scope)})`;
    return html`<li>${finding.title}${where}: <strong>${measured}</strong> <span class="muted">${limits}</span></li>\n`;
  })}</ul>`;
  if (findings.length <= MOST_WITHIN)
    return html`<div><h3 class="small">Within their limits</h3>${list}</div>`;
  return html`<details><summary>${findings.length} within their limits</summary>${list}</details>`;
}
