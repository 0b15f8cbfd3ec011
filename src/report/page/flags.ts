/** The suggested flags with what each costs. On a narrow page every flag is a block of lines. */
import type { FlagEntry } from "../../flags/entry.ts";
import { formatCount, formatPercent } from "../../util/units.ts";
import { formatChange } from "../quantity.ts";
import type { Check } from "../report.ts";
import type { ScopeWords } from "../scope.ts";
import { PROPOSALS, sentence, upperFirst } from "../words.ts";
import { html, type Markup, type Piece } from "./markup.ts";
import { section, stackedTable } from "./parts.ts";

const COLUMNS = [
  { head: "Flag" },
  { head: "Drops" },
  { head: "Share", numeric: true, named: true },
  { head: "Confidence", numeric: true, named: true },
  { head: "Sensitivity", numeric: true, named: true },
  { head: "Beam axes", numeric: true, named: true },
  { head: "Sidelobe", numeric: true, named: true },
  { head: "Gap", numeric: true, named: true },
] as const;

export function flagsSection(check: Check, words: ScopeWords): Markup {
  const { flags } = check;
  const content = flags.length === 0 ? html`<p>None are suggested.</p>` : flagTable(check, words);
  return section("flags", "Suggested flags", [content, doubtList(check, words)]);
}

function doubtList(check: Check, words: ScopeWords): Piece {
  if (check.doubts.length === 0) return undefined;
  return html`<div><h3 class="small">In doubt: for a person to look at, no flag is suggested</h3>
<ul class="plain">${check.doubts.map(
    ({ selection, rule, reason, why }) =>
      html`<li><strong>${upperFirst(words.scope(selection))}</strong>: ${sentence(words.reason(reason, selection))} ${sentence(why)} <span class="muted small">Rule <span class="code">${rule}</span></span></li>\n`,
  )}</ul></div>`;
}

function flagTable(check: Check, words: ScopeWords): Markup {
  const { flags } = check;
  const together = ` All together they cost ${formatPercent(check.sensitivityLossFraction)} of the sensitivity.`;
  return html`<p class="note">${PROPOSALS}${together}</p>
${stackedTable(
  "Suggested flags and their cost",
  COLUMNS,
  flags.map((flag) => cellsOf(flag, words)),
)}
<p class="small muted">Share: of the samples not flagged yet. Confidence: that the flag removes a fault and not sky.
Sensitivity: lost with natural weighting. Beam axes (major, minor), peak sidelobe and largest gap: relative change,
planned weighting.</p>`;
}

function cellsOf(flag: FlagEntry, words: ScopeWords): Piece[] {
  const { cost } = flag;
  const [major, minor] = [cost.beamMajorChangeFraction, cost.beamMinorChangeFraction].map(formatChange);
  return [
    html`<span class="flag-id">${flag.id}</span>`,
    html`<strong>${upperFirst(words.scope(flag))}</strong><br>${sentence(words.reason(flag.reason, flag))}
<span class="muted small">${formatCount(flag.samples)} samples, rule <span class="code">${flag.rule}</span></span>`,
    formatPercent(flag.fraction),
    formatPercent(flag.confidence),
    formatChange(-cost.sensitivityLossFraction),
    major === minor ? major : html`${major},<br>${minor}`,
    formatChange(cost.peakSidelobeChangeFraction),
    formatChange(cost.largestGapChangeFraction),
  ];
}
