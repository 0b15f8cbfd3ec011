/** What the imaging run should be told, the plan, the numbers, and what could not be seen. */
import { numberTables } from "../numbers.ts";
import { planTable } from "../plan-table.ts";
import type { Check } from "../report.ts";
import { notJudgedTexts, sentence } from "../words.ts";
import { html, type Markup } from "./markup.ts";
import { dataTable, section, stackedTable } from "./parts.ts";

export function settingsSection(check: Check): Markup {
  const { advice } = check.image;
  if (advice.length === 0) {
    const nothing = html`<p>None can be given: too little is usable.</p>`;
    return section("settings", "Settings for the imaging run", nothing);
  }
  return section(
    "settings",
    "Settings for the imaging run",
    stackedTable(
      "Settings for the imaging run",
      [{ head: "Setting" }, { head: "Value" }, { head: "Why" }],
      advice.map(({ name, value, why }) => [
        name,
        html`<strong>${value}</strong>`,
        html`<span class="muted">${why}</span>`,
      ]),
    ),
  );
}

export function planSection(check: Check): Markup {
  const { caption, columns, rows } = planTable(check.plan);
  return section("plan", "The plan it was judged against", stackedTable(caption, columns, rows));
}

export function numbersSection(check: Check): Markup {
  const [beams, coverage, ...rest] = numberTables(check);
  const tables = html`<div class="tables">${dataTable(beams!, { full: true })}${dataTable(coverage!, { full: true })}${rest.map((table) => dataTable(table))}</div>`;
  return section("numbers", "The numbers", tables);
}

export function blindSection(check: Check): Markup {
  const { notJudged } = check.before;
  const texts = [
    ...check.blindSpots.map((text) => html`<li>${sentence(text)}</li>`),
    ...notJudgedTexts(notJudged).map(
      ({ rules, why }) => html`<li>${rules} could not be judged: ${why}.</li>`,
    ),
  ];
  const content =
    texts.length === 0
      ? html`<p>Nothing that it looks for was out of its sight.</p>`
      : html`<ul class="plain">${texts}</ul>`;
  return section("blind", "What visvet could not see", content);
}

export function noticedSection(check: Check): Markup {
  const { notes } = check.dataset;
  const foreign = check.rulesFrom.filter(({ from }) => from !== "ours");
  if (notes.length === 0 && foreign.length === 0) return html``;
  return section(
    "noticed",
    "Noticed in the file",
    html`${notes.length > 0 && html`<ul class="plain">${notes.map(({ kind, text }) => html`<li>${kind === "fault" && html`<strong>Fault:</strong> `}${sentence(text)}</li>`)}</ul>`}
${foreign.length > 0 && html`<h3 class="small">Rules that are not ours</h3><ul class="plain">${foreign.map(({ id, from }) => html`<li><span class="code">${id}</span> from ${from}</li>`)}</ul>`}`,
  );
}
