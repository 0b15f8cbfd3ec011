/** Pieces that several sections of the page are made of. */
import type { DataTable } from "../tables.ts";
import { html, type Markup, type Piece } from "./markup.ts";

/** A section with its heading, to be linked to. */
export function section(id: string, title: string, content: Piece): Markup {
  return html`
<section class="section" aria-labelledby="${id}">
<h2 id="${id}">${title}</h2>
<div>${content}</div>
</section>`;
}

export interface TableOptions {
  /** across the whole section */
  readonly full?: boolean;
  /** the section's heading says it already */
  readonly quietCaption?: boolean;
}

/** A table in a frame that scrolls by itself where the page is narrower; reachable by keyboard for that. */
export function dataTable(data: DataTable, options: TableOptions = {}): Markup {
  const side = (numeric: boolean) => numeric && html` class="number"`;
  const rows = data.rows.map((row) => {
    const [name, ...cells] = row;
    const sub = name!.startsWith("  ");
    return html`<tr><th scope="row"${sub && html` class="sub"`}>${name!.trim()}</th>${cells.map(
      (cell, i) => html`<td${side(data.columns[i + 1]!.numeric)}>${cell}</td>`,
    )}</tr>\n`;
  });
  return html`<div${options.full === true && html` class="full"`}>
<div class="scroll" tabindex="0" role="region" aria-label="${data.caption}">
<table><caption${options.quietCaption === true && html` class="unseen"`}>${data.caption}</caption>
<thead><tr>${data.columns.map((column) => html`<th scope="col"${side(column.numeric)}>${column.head}</th>`)}</tr></thead>
<tbody>
${rows}</tbody></table></div>
${data.note !== undefined && html`<p class="small muted">${data.note}</p>`}</div>`;
}

/**
 * A table whose rows become blocks of lines on a narrow page. The roles keep it a table for a screen reader, which
 * would lose it with the layout. Cells may be markup.
 */
export function stackedTable(
  caption: string,
  columns: readonly { readonly head: string; readonly numeric?: boolean; readonly named?: boolean }[],
  rows: readonly (readonly Piece[])[],
): Markup {
  const side = (numeric: boolean | undefined) => numeric === true && html` class="number"`;
  const body = rows.map(([name, ...cells]) => {
    const rest = cells.map((cell, i) => {
      const { head, numeric, named } = columns[i + 1]!;
      return html`<td role="cell"${side(numeric)}${named === true && html` data-head="${head}"`}>${cell}</td>`;
    });
    return html`<tr role="row"><th scope="row" role="rowheader">${name}</th>${rest}</tr>\n`;
  });
  return html`<table class="stacks" role="table"><caption class="unseen">${caption}</caption>
<thead role="rowgroup"><tr role="row">${columns.map(
    ({ head, numeric }) => html`<th scope="col" role="columnheader"${side(numeric)}>${head}</th>`,
  )}</tr></thead>
<tbody role="rowgroup">
${body}</tbody></table>`;
}
