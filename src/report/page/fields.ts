/** Each field of several, on the page. */
import { fieldNotes, fieldTable } from "../field-table.ts";
import type { Check } from "../report.ts";
import { html, type Markup } from "./markup.ts";
import { dataTable, section } from "./parts.ts";

export function fieldsSection({ byField }: Check): Markup {
  if (byField === null) return html``;
  return section(
    "fields",
    "Field by field",
    html`${dataTable(fieldTable(byField), { full: true, quietCaption: true })}
${fieldNotes(byField).map((text) => html`<p class="small muted">${text}</p>\n`)}`,
  );
}
