/** The image, or what its sources leave of it, as a picture with axes on the sky. */
import { axisX, axisY, type RenderFunction } from "@observablehq/plot";
import { encode } from "fast-png";
import { drawChart, SQUARE } from "../../report/plots/chart.ts";
import { picture } from "../../report/plots/marks.ts";
import { node } from "../../report/plots/node.ts";
import { quantileOf } from "../../report/plots/quantile.ts";
import { angleUnit, roundBelow } from "../../report/plots/ticks.ts";
import { pixelOf } from "../sky/look.ts";
import type { Understanding } from "../sky/understand.ts";
import { pixelOffset, skyOffset } from "../uv/frame.ts";

export interface ImageChart {
  readonly svg: string;
  /** the value at which the shades are full, image unit */
  readonly full: number;
}

/** Pixels a side, at most: more is bytes that the page cannot show. */
const MOST_PIXELS = 320;
/** Okabe & Ito 2008, Color Universal Design: vermillion and blue. */
const POSITIVE = [213, 94, 0] as const;
const NEGATIVE = [0, 114, 178] as const;
const ARCSECONDS = (180 / Math.PI) * 3600;

/** @param pixels of the window, as `seen.image.pixels` */
export function imageChart(seen: Understanding, pixels: Float64Array, id: string, label: string): ImageChart {
  const { image, frame } = seen;
  // The square on the sky that holds the window, however it is turned.
  const corners = [-1, 1].flatMap((x) =>
    [-1, 1].map((y) => {
      const [a, b, c, d] = frame.matrix;
      const [dx, dy] = [(x * image.width) / 2, (y * image.height) / 2];
      return Math.max(Math.abs(a * dx + b * dy), Math.abs(c * dx + d * dy));
    }),
  );
  const reach = Math.max(...corners);
  const side = Math.min(MOST_PIXELS, Math.max(image.width, image.height));
  const sky = resampled(seen, pixels, side, reach);
  const full = fullShade(sky);
  const { divisor, name } = angleUnit(reach * ARCSECONDS);
  const limit = (reach * ARCSECONDS) / divisor;
  const [east, north] = centreOf(seen).map((value) => (value * ARCSECONDS) / divisor) as [number, number];
  const x = [east + limit, east - limit] as const;
  const y = [north - limit, north + limit] as const;
  const svg = drawChart({
    id,
    label,
    height: SQUARE,
    // East is to the left, as on the sky.
    x: { domain: [...x], label: null },
    y: { domain: [...y], label: null },
    marks: [
      axisX({ ticks: 5, label: `east (${name})`, labelArrow: "none" }),
      axisY({ ticks: 5, label: `north (${name})`, labelArrow: "none" }),
      picture(`data:image/png;base64,${Buffer.from(png(sky, side, full)).toString("base64")}`, { x, y }),
      sourceMarks(seen, divisor),
    ],
  });
  return { svg, full };
}

/** Direction cosines of the middle of the window: between two pixels where their number is even. */
function centreOf({ image, frame }: Understanding): [number, number] {
  const { width, height } = image;
  return skyOffset(frame, (width - 1) / 2 - (width >> 1), (height - 1) / 2 - (height >> 1));
}

/** (side x side), row 0 north, column 0 east; NaN outside the window. */
function resampled(seen: Understanding, pixels: Float64Array, side: number, reach: number): Float64Array {
  const { image, frame } = seen;
  const out = new Float64Array(side * side).fill(Number.NaN);
  const [east, north] = centreOf(seen);
  for (let row = 0, at = 0; row < side; row++) {
    for (let column = 0; column < side; column++, at++) {
      const l = east + reach * (1 - (2 * (column + 0.5)) / side);
      const m = north + reach * (1 - (2 * (row + 0.5)) / side);
      const [dx, dy] = pixelOffset(frame, l, m);
      const x = Math.round(dx + (image.width >> 1));
      const y = Math.round(dy + (image.height >> 1));
      if (x < 0 || y < 0 || x >= image.width || y >= image.height) continue;
      if (image.known[y * image.width + x] === 1) out[at] = pixels[y * image.width + x]!;
    }
  }
  return out;
}

function fullShade(values: Float64Array): number {
  const sizes = Array.from(values, Math.abs)
    .filter((value) => Number.isFinite(value))
    .sort((a, b) => a - b);
  return roundBelow(Math.max(quantileOf(sizes, 0.99, 1), 1e-12) * 1.25);
}

/** Colour by sign and opacity by size: zero is the page's own ground, light or dark. */
function png(values: Float64Array, side: number, full: number): Uint8Array {
  const data = new Uint8Array(side * side * 4);
  values.forEach((value, i) => {
    const shade = Number.isFinite(value) ? Math.min(1, Math.abs(value) / full) : 0;
    data.set(value < 0 ? NEGATIVE : POSITIVE, 4 * i);
    // 32 shades: the eye tells no more apart, and the picture packs smaller.
    data[4 * i + 3] = Math.round((Math.round(shade * 32) / 32) * 255);
  });
  return encode({ width: side, height: side, data, channels: 4, depth: 8 });
}

/** A ring around each source, a cross at the centre. */
function sourceMarks(seen: Understanding, divisor: number): RenderFunction {
  return (_index, scales, _values, _dimensions, context) => {
    const { document } = context;
    const x = scales.x as (value: number) => number;
    const y = scales.y as (value: number) => number;
    const group = node(document, "g", {});
    for (const source of seen.sources) {
      const [px, py] = pixelOf(seen, source);
      if (px < 0 || py < 0 || px >= seen.image.width || py >= seen.image.height) continue;
      group.appendChild(
        node(document, "circle", {
          cx: x((source.l * ARCSECONDS) / divisor),
          cy: y((source.m * ARCSECONDS) / divisor),
          r: 9,
          fill: "none",
          stroke: "var(--ink)",
          "stroke-width": 1.2,
        }),
      );
    }
    const [cx, cy] = [x(0), y(0)];
    const d = `M${cx - 6} ${cy}h12M${cx} ${cy - 6}v12`;
    group.appendChild(node(document, "path", { d, stroke: "var(--ink)", "stroke-width": 1.2 }));
    return group;
  };
}
