/**
 * Charts as SVG text: axes and scales by Plot in a document without a browser. Colours are the page's own, by name,
 * so that a chart is light, dark or printed with it.
 */
import { type PlotOptions, plot } from "@observablehq/plot";
import { parseHTML } from "linkedom";
import { escapeHtml } from "../../util/html.ts";
import { plainText } from "../../util/terminal.ts";
import type { SvgDocument } from "./node.ts";

/** The page's colours (see page/style.ts); each also differs in lightness. */
export const COLOUR = {
  kept: "var(--kept)",
  suggested: "var(--suggested)",
  flagged: "var(--flagged)",
  bad: "var(--bad)",
  limit: "var(--limit)",
  faint: "var(--rule)",
} as const;

/** User units; the page scales charts to the room there is and their text against that. */
export const CHART_WIDTH = 480;

export const MARGIN = { top: 26, bottom: 42, left: 46, right: 8 } as const;

/** Height at which the plotting area is as high as it is wide. */
export const SQUARE = CHART_WIDTH - MARGIN.left - MARGIN.right + MARGIN.top + MARGIN.bottom;

/** Room between the labels and the frame that the page draws around. */
const PADDING = 9;

export interface ChartOptions extends PlotOptions {
  /** unique in the page */
  readonly id: string;
  /** what a screen reader says of it: names are hostile and escaped here */
  readonly label: string;
}

/** The document that charts are drawn in; it is never shown and each chart leaves it as it was. */
let page: SvgDocument | undefined;

export function drawChart({ id, label, ...options }: ChartOptions): string {
  page ??= parseHTML("<!doctype html><html><body></body></html>").document as unknown as SvgDocument;
  const element = plot({
    width: CHART_WIDTH,
    height: 340,
    marginTop: MARGIN.top,
    marginBottom: MARGIN.bottom,
    marginLeft: MARGIN.left,
    marginRight: MARGIN.right,
    className: "chart",
    document: page,
    ...options,
  });
  element.querySelector("style")?.remove();
  return finished(element.outerHTML, id, label);
}

/**
 * - Plot numbers clip paths by a counter of the process: they get numbers of the chart's own, so that the same chart is
 *   the same text.
 * - Coordinates keep two decimals: more is bytes that nobody sees.
 * - Names in it are escaped by the document, which lets through what cannot be printed.
 * - Parts that Plot labels for itself would be read out one by one inside an image that has its own label.
 */
function finished(svg: string, id: string, label: string): string {
  const clips = new Map<string, string>();
  return plainText(svg)
    .replace(/ (?:width|height)="[\d.]+"(?=[^>]* class="chart")/g, "")
    .replace(
      /viewBox="0 0 ([\d.]+) ([\d.]+)"/,
      (_, width: string, height: string) =>
        `viewBox="${-PADDING} ${-PADDING} ${Number(width) + 2 * PADDING} ${Number(height) + 2 * PADDING}"`,
    )
    .replace(/<[^>]+>/g, (tag) =>
      tag
        .replace(/plot-clip-\d+/g, (name) => {
          if (!clips.has(name)) clips.set(name, `${id}-clip-${clips.size + 1}`);
          return clips.get(name)!;
        })
        .replace(/-?\d+\.\d{3,}(?:e-?\d+)?/g, (number) => String(Number(Number(number).toFixed(2))))
        .replace(/ aria-(?:label|description|hidden)="[^"]*"/g, ""),
    )
    .replace(
      /^<svg /,
      `<svg xmlns="http://www.w3.org/2000/svg" id="${escapeHtml(id)}" role="img" aria-label="${escapeHtml(label)}" `,
    );
}
