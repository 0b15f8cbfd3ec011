/**
 * The HTML report: one file that needs no network, no script and nothing beside it. The same check gives the same
 * bytes.
 */
import { fieldsSection } from "./page/fields.ts";
import { figuresSection } from "./page/figures.ts";
import { findingsSection } from "./page/findings.ts";
import { flagsSection } from "./page/flags.ts";
import { limitsSection } from "./page/limits.ts";
import { html, Markup } from "./page/markup.ts";
import {
  blindSection,
  noticedSection,
  numbersSection,
  planSection,
  settingsSection,
} from "./page/settings.ts";
import { STYLE } from "./page/style.ts";
import { verdictSection } from "./page/verdict.ts";
import type { Check } from "./report.ts";
import { scopeWords } from "./scope.ts";
import { tool } from "./tool.ts";
import { VERDICT_NAME } from "./words.ts";

/** Styles of its own and pictures in the file itself; no script, no form, nothing fetched. */
export const POLICY =
  "default-src 'none'; style-src 'unsafe-inline'; img-src data:; base-uri 'none'; form-action 'none'";

const CONTENTS: readonly (readonly [string, string])[] = [
  ["fields", "Fields"],
  ["flags", "Flags"],
  ["limits", "Limits"],
  ["findings", "Findings"],
  ["settings", "Settings"],
  ["plots", "Plots"],
  ["numbers", "Numbers"],
  ["blind", "Not seen"],
];

export function writeHtml(check: Check): string {
  const words = scopeWords(check.dataset);
  const { name, version } = tool();
  const page = html`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${POLICY}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="referrer" content="no-referrer">
<meta name="color-scheme" content="light dark">
<title>${VERDICT_NAME[check.verdict]}: ${check.dataset.name}</title>
<style>${new Markup(STYLE)}</style>
</head>
<body>
<a class="skip" href="#main">Skip to the verdict</a>
<div class="sheet">
<header class="top">
<p class="mark">visvet report</p>
<nav aria-label="Contents"><ul>${CONTENTS.filter(([id]) => id !== "fields" || check.byField !== null).map(([id, title]) => html`<li><a href="#${id}">${title}</a></li>`)}</ul></nav>
</header>
<main id="main">
${verdictSection(check)}
${fieldsSection(check)}
${flagsSection(check, words)}
${limitsSection(check, words)}
${findingsSection(check, words)}
${settingsSection(check)}
${planSection(check)}
${figuresSection(check, words)}
${numbersSection(check)}
${blindSection(check)}
${noticedSection(check)}
</main>
<footer><p>Written by ${name} ${version} from ${check.dataset.name}. Times are UTC. The dataset has not been changed.</p></footer>
</div>
</body>
</html>
`;
  return page.text;
}
