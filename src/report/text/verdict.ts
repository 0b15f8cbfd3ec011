/** The top of the text report: the verdict, the score, what took it, and what was looked at. */
import { datasetFacts } from "../dataset-facts.ts";
import type { Check } from "../report.ts";
import {
  findingCounts,
  moreRules,
  pointsText,
  scoreSentence,
  VERDICT_NAME,
  verdictAdvice,
} from "../words.ts";
import type { Paper } from "./paper.ts";

export function verdictSection(paper: Paper, check: Check): void {
  const { verdict, findings } = check;
  paper.prose(`${VERDICT_NAME[verdict].toUpperCase()}: ${check.dataset.name}`, 0, paper.ink.verdict[verdict]);
  paper.prose(verdictAdvice(check), 2, paper.ink.strong);
  paper.prose(`${scoreSentence(check)} Found: ${findingCounts(findings)}.`);
  const { taken } = check.before;
  if (taken.length > 0) {
    const shares = taken.slice(0, 6).map(({ rule, points }) => `${rule} ${pointsText(points)}`);
    const rest = taken.length - shares.length;
    paper.prose(`Points lost to ${shares.join(", ")}${rest > 0 ? ` ${moreRules(rest)}` : ""}.`);
  }
  paper.gap();
  for (const { label, value } of datasetFacts(check.survey)) paper.entry(label, value, { labelWidth: 11 });
}
