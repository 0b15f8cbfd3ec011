/** What the imaging run should be told, and the plan that the dataset was judged against. */
import { plainText } from "../../util/terminal.ts";
import { planTable } from "../plan-table.ts";
import type { Check } from "../report.ts";
import type { Paper } from "./paper.ts";
import { displayWidth } from "./width.ts";

/** Columns in which a reason reads well. */
const ENOUGH_FOR_REASONS = 48;

export function settingsSection(paper: Paper, check: Check): void {
  const { advice } = check.image;
  paper.heading("Settings for the imaging run");
  if (advice.length === 0) {
    paper.prose("None can be given: too little is usable.");
    return;
  }
  const heads = [
    { head: "Setting", numeric: false },
    { head: "Value", numeric: false, ink: paper.ink.strong },
  ];
  const rows = advice.map(({ name, value, why }) => [name, value, why]);
  const widest = (column: number) => Math.max(...rows.map((row) => displayWidth(plainText(row[column]!))));
  // Beside the value where there is room for the reasons, else on lines of their own below it.
  const beside = 2 + widest(0) + 2 + widest(1) + 2 + Math.min(widest(2), ENOUGH_FOR_REASONS) <= paper.width;
  paper.table(beside ? [...heads, { head: "Why", numeric: false }] : heads, rows);
}

export function planSection(paper: Paper, check: Check): void {
  const { columns, rows } = planTable(check.plan);
  paper.heading("The plan it was judged against");
  paper.table(columns, rows);
}
