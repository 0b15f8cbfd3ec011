/** The suggested flags and what each costs. */
import { formatCount, formatPercent } from "../../util/units.ts";
import { formatChange } from "../quantity.ts";
import type { Check } from "../report.ts";
import type { ScopeWords } from "../scope.ts";
import { PROPOSALS, sentence, upperFirst } from "../words.ts";
import type { Paper } from "./paper.ts";

export function flagsSection(paper: Paper, check: Check, words: ScopeWords): void {
  const { flags } = check;
  paper.heading("Suggested flags");
  if (flags.length === 0) paper.prose("None are suggested.");
  else flagTable(paper, check, words);
  if (check.doubts.length === 0) return;
  paper.gap();
  paper.prose("In doubt, so for a person to look at; no flag is suggested:", 2, paper.ink.strong);
  for (const { selection, reason, why } of check.doubts) {
    paper.bullet(
      `${upperFirst(words.scope(selection))}: ${sentence(words.reason(reason, selection))} ${sentence(why)}`,
    );
  }
}

function flagTable(paper: Paper, check: Check, words: ScopeWords): void {
  const { flags } = check;
  paper.prose(PROPOSALS);
  paper.prose(`All together they cost ${formatPercent(check.sensitivityLossFraction)} of the sensitivity.`);
  paper.gap();
  paper.table(
    [
      { head: "Flag", numeric: false, ink: paper.ink.strong },
      { head: "Drops", numeric: false },
      { head: "Share", numeric: true },
      { head: "Sensitivity", numeric: true },
      { head: "Beam", numeric: true },
      { head: "Sidelobe", numeric: true },
      { head: "Sure", numeric: true },
    ],
    flags.map((flag) => [
      flag.id,
      words.scope(flag),
      formatPercent(flag.fraction),
      formatChange(-flag.cost.sensitivityLossFraction),
      formatChange(flag.cost.beamMajorChangeFraction),
      formatChange(flag.cost.peakSidelobeChangeFraction),
      formatPercent(flag.confidence),
      `${words.reason(flag.reason, flag)} (${formatCount(flag.samples)} samples)`,
    ]),
  );
  paper.prose(
    "Share: of the samples not flagged yet. Sensitivity: lost with them. Beam, Sidelobe: change of the major axis and of " +
      "the peak sidelobe. Sure: confidence that it removes a fault and not sky.",
    2,
    paper.ink.faint,
  );
}
