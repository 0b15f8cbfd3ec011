/** Each field of several, in the text report. */

import { fieldNotes, fieldTable } from "../field-table.ts";
import type { Check } from "../report.ts";
import type { Paper } from "./paper.ts";

export function fieldsSection(paper: Paper, { byField }: Check): void {
  if (byField === null) return;
  const { columns, rows } = fieldTable(byField);
  paper.heading("Field by field");
  // The main cause, the last column, goes on a line of its own below the numbers.
  paper.table(columns.slice(0, -1), rows);
  for (const text of fieldNotes(byField)) paper.prose(text, 2, paper.ink.faint);
}
