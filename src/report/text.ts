/** The text report: for a terminal, a log or a screen reader. Nothing in it is said by colour or by drawing alone. */

import { numberTables } from "./numbers.ts";
import type { Check } from "./report.ts";
import { scopeWords } from "./scope.ts";
import { blindSection, notesSection } from "./text/closing.ts";
import { fieldsSection } from "./text/fields.ts";
import { findingsSection } from "./text/findings.ts";
import { flagsSection } from "./text/flags.ts";
import { limitsSection } from "./text/limits.ts";
import { Paper } from "./text/paper.ts";
import { planSection, settingsSection } from "./text/settings.ts";
import { verdictSection } from "./text/verdict.ts";

export interface TextOptions {
  /** columns of the terminal; at least 40 are used */
  readonly width: number;
  readonly colour: boolean;
}

/** The whole report, lines of at most `width` columns, ending in a line end. */
export function writeText(check: Check, options: TextOptions): string {
  const paper = new Paper(options);
  const words = scopeWords(check.dataset);
  verdictSection(paper, check);
  fieldsSection(paper, check);
  limitsSection(paper, check, words);
  findingsSection(paper, check, words);
  flagsSection(paper, check, words);
  settingsSection(paper, check);
  planSection(paper, check);
  paper.heading("The numbers");
  for (const table of numberTables(check)) paper.dataTable(table);
  blindSection(paper, check);
  notesSection(paper, check);
  return paper.text;
}
