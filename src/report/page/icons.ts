/** The verdicts as shapes: a disc with a tick, a triangle, an octagon with a bar. The word always stands beside. */
import type { Verdict } from "../../rules/finding.ts";
import { VERDICT_NAME } from "../words.ts";
import { html, Markup } from "./markup.ts";

const SHAPES: Readonly<Record<Verdict, string>> = {
  ready:
    '<circle cx="12" cy="12" r="11" fill="currentColor"/>' +
    '<path d="M6.5 12.5l3.8 3.8 7.2-8" fill="none" stroke="var(--surface)" stroke-width="2.6"/>',
  caution:
    '<path d="M12 1.5L23.4 22H.6z" fill="currentColor"/>' +
    '<path d="M12 8.5v6.5M12 17.4v2.4" fill="none" stroke="var(--surface)" stroke-width="2.5"/>',
  hold:
    '<path d="M7.4 1h9.2L23 7.4v9.2L16.6 23H7.4L1 16.6V7.4z" fill="currentColor"/>' +
    '<path d="M6.5 12h11" fill="none" stroke="var(--surface)" stroke-width="3"/>',
};

export function verdictIcon(verdict: Verdict): Markup {
  return new Markup(`<svg viewBox="0 0 24 24" aria-hidden="true" focusable="false">${SHAPES[verdict]}</svg>`);
}

export function verdictTag(verdict: Verdict): Markup {
  return html`<span class="tag">${verdictIcon(verdict)}${VERDICT_NAME[verdict]}</span>`;
}
