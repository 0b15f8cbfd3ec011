/** The findings by severity: each with its samples, its number, its limits, its consequence and what to do. */
import type { Finding } from "../../rules/finding.ts";
import type { Check } from "../report.ts";
import type { ScopeWords } from "../scope.ts";
import { limitsText, toDo, VERDICT_NAME } from "../words.ts";
import type { Paper } from "./paper.ts";

export function findingsSection(paper: Paper, check: Check, words: ScopeWords): void {
  const serious = check.findings.filter((finding) => finding.verdict !== "ready");
  const within = check.findings.filter((finding) => finding.verdict === "ready");
  paper.heading("Findings");
  if (serious.length === 0) paper.prose("Nothing goes beyond its caution limit.");
  for (const [i, finding] of serious.entries()) {
    if (i > 0) paper.gap();
    oneFinding(paper, finding, i + 1, words);
  }
  if (within.length === 0) return;
  paper.gap();
  paper.prose("Within their limits:", 2, paper.ink.strong);
  for (const finding of within) {
    const { measured, limits } = limitsText(finding);
    const where = Object.keys(finding.scope).length === 0 ? "" : ` (${words.scope(finding.scope)})`;
    paper.bullet(`${finding.title}${where}: ${measured}; ${limits}.`);
  }
}

function oneFinding(paper: Paper, finding: Finding, number: number, words: ScopeWords): void {
  const { measured, limits } = limitsText(finding);
  const name = VERDICT_NAME[finding.verdict].toUpperCase();
  const row = (label: string, text: string) => paper.entry(label, text, { indent: 4, labelWidth: 11 });
  paper.prose(`${number}. ${name}: ${finding.title}`, 2, paper.ink.verdict[finding.verdict]);
  row("Where", words.scope(finding.scope));
  row("Measured", `${measured}; ${limits}`);
  row("Limits", `from ${finding.limits.from}`);
  row("In image", finding.consequence.text);
  row("To do", toDo(finding));
  if (finding.evidence.length > 0) row("Evidence", words.named(finding.evidence.join(" ")));
  row("Rule", `${finding.rule}, severity ${finding.severity.toFixed(2)} of 1`);
}
