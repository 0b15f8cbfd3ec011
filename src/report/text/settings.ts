/** What the imaging run should be told, and the plan that the dataset was judged against. */
import { planTable } from "../plan-table.ts";
import type { Check } from "../report.ts";
import type { Paper } from "./paper.ts";

export function settingsSection(paper: Paper, check: Check): void {
  const { advice } = check.image;
  paper.heading("Settings for the imaging run");
  if (advice.length === 0) paper.prose("None can be given: too little is usable.");
  else {
    paper.table(
      [
        { head: "Setting", numeric: false },
        { head: "Value", numeric: false, ink: paper.ink.strong },
        { head: "Why", numeric: false },
      ],
      advice.map(({ name, value, why }) => [name, value, why]),
    );
  }
}

export function planSection(paper: Paper, check: Check): void {
  const { columns, rows } = planTable(check.plan);
  paper.heading("The plan it was judged against");
  paper.table(columns, rows);
}
