/** What could not be seen or judged, what the file's writer should know, and the rules that are not ours. */
import type { Check } from "../report.ts";
import { notJudgedTexts, sentence } from "../words.ts";
import type { Paper } from "./paper.ts";

export function blindSection(paper: Paper, check: Check): void {
  const { notJudged } = check.before;
  paper.heading("What visvet could not see");
  if (check.blindSpots.length === 0 && notJudged.length === 0)
    paper.prose("Nothing that it looks for was out of its sight.");
  for (const text of check.blindSpots) paper.bullet(sentence(text));
  for (const { rules, why } of notJudgedTexts(notJudged))
    paper.bullet(`${rules} could not be judged: ${why}.`);
}

export function notesSection(paper: Paper, check: Check): void {
  const { notes } = check.dataset;
  const foreign = check.rulesFrom.filter(({ from }) => from !== "ours");
  if (notes.length > 0) {
    paper.heading("Noticed in the file");
    for (const { kind, text } of notes) paper.bullet(`${kind === "fault" ? "Fault: " : ""}${sentence(text)}`);
  }
  if (foreign.length > 0) {
    paper.heading("Rules that are not ours");
    for (const { id, from } of foreign) paper.bullet(`${id}, from ${from}`);
  }
}
