/** The text report of a triage. */
import { Paper } from "../../report/text/paper.ts";
import type { TextOptions } from "../../report/text.ts";
import { PROPOSALS, sentence } from "../../report/words.ts";
import { formatCount, formatPercent } from "../../util/units.ts";
import type { TriageCause } from "../causes/cause.ts";
import type { Triage } from "../triage.ts";
import { symptomTable, trackTable, triageFacts, weightText } from "./words.ts";

/** The whole report, lines of at most `width` columns, ending in a line end. */
export function triageText(triage: Triage, options: TextOptions): string {
  const paper = new Paper(options);
  paper.heading("visvet triage");
  paper.prose(triage.statement, 2, paper.ink.strong);
  paper.gap();
  for (const { label, value } of triageFacts(triage)) paper.entry(label, value, { labelWidth: 11 });
  const symptoms = symptomTable(triage);
  if (symptoms !== null) {
    paper.heading("Symptoms");
    paper.prose(`${symptoms.caption}.`, 2, paper.ink.faint);
    paper.table(symptoms.columns, symptoms.rows);
  }
  causesSection(paper, triage);
  flagsSection(paper, triage);
  const tracks = trackTable(triage);
  if (tracks !== null) {
    paper.heading("The uv plane");
    paper.dataTable(tracks);
  }
  paper.heading("What triage could not see");
  for (const text of triage.blindSpots) paper.bullet(sentence(text));
  return paper.text;
}

function causesSection(paper: Paper, { causes, minor, image }: Triage): void {
  paper.heading("Causes");
  if (causes.length === 0) {
    paper.prose(image === null ? "The data show none." : "Nothing is blamed.");
  }
  causes.forEach((cause, i) => {
    if (i > 0) paper.gap();
    paper.prose(`${i + 1}. ${cause.title}: ${weightText(cause)}`, 2, paper.ink.verdict.hold);
    causeRows(paper, cause);
  });
  if (minor.length === 0) return;
  paper.gap();
  paper.prose("At fault in the data, though the image hardly shows it:", 2, paper.ink.strong);
  for (const { title, where } of minor) paper.bullet(`${title} (${where}).`);
}

function causeRows(paper: Paper, cause: TriageCause): void {
  const row = (label: string, text: string) => paper.entry(label, text, { indent: 4, labelWidth: 11 });
  if (cause.where !== "") row("Where", cause.where);
  row("Evidence", cause.evidence.join(" "));
  row("Test", cause.test);
  row("Cure", cause.cure);
  if (cause.flags.length > 0) row("Flags", cause.flags.join(", "));
  if (cause.rules.length > 0) row("Rules", cause.rules.join(", "));
}

function flagsSection(paper: Paper, { flags, words }: Triage): void {
  paper.heading("Suggested flags");
  if (flags.length === 0) {
    paper.prose("None are suggested.");
    return;
  }
  paper.prose(PROPOSALS);
  paper.gap();
  paper.table(
    [
      { head: "Flag", numeric: false, ink: paper.ink.strong },
      { head: "Drops", numeric: false },
      { head: "Share", numeric: true },
      { head: "Sensitivity", numeric: true },
      { head: "Sure", numeric: true },
    ],
    flags.map((flag) => [
      flag.id,
      words.scope(flag),
      formatPercent(flag.fraction),
      `-${formatPercent(flag.cost.sensitivityLossFraction)}`,
      formatPercent(flag.confidence),
      `${sentence(words.reason(flag.reason, flag))} ${formatCount(flag.samples)} samples.`,
    ]),
  );
}
