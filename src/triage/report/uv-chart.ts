/** The uv plane of what the sources leave: amplitude as shade, cells out of family marked. */
import { axisX, axisY, ruleX, ruleY } from "@observablehq/plot";
import { encode } from "fast-png";
import { COLOUR, drawChart, SQUARE } from "../../report/plots/chart.ts";
import { dots, picture } from "../../report/plots/marks.ts";
import { wavelengthUnit } from "../../report/plots/ticks.ts";
import { formatWavelengths } from "../../report/quantity.ts";
import type { Understanding } from "../sky/understand.ts";
import type { UvCells } from "../uv/cells.ts";
import { cyclesX, cyclesY } from "../uv/frame.ts";

const PIXELS = 240;
/** Cells marked, at most: those with most power. */
const MOST_MARKED = 600;
/** Okabe & Ito 2008, Color Universal Design: blue. */
const SHADE = [0, 114, 178] as const;

export function uvChart(seen: Understanding, cells: UvCells): string {
  const reach = seen.sampling.longest * 1.05;
  const { divisor, name } = wavelengthUnit(reach);
  const limit = reach / divisor;
  const range = { x: [-limit, limit], y: [-limit, limit] } as const;
  const image = Buffer.from(amplitudePng(seen, cells, reach)).toString("base64");
  return drawChart({
    id: "triage-uv",
    label: `amplitude of the image without its sources in the uv plane, out to ${formatWavelengths(reach)}`,
    height: SQUARE,
    x: { domain: [-limit, limit], label: null },
    y: { domain: [-limit, limit], label: null },
    marks: [
      ruleX([0], { stroke: COLOUR.faint }),
      ruleY([0], { stroke: COLOUR.faint }),
      axisX({ ticks: 5, label: `u, east (${name})`, labelArrow: "none" }),
      axisY({ ticks: 5, label: `v, north (${name})`, labelArrow: "none" }),
      picture(`data:image/png;base64,${image}`, range),
      dots(markedCells(seen, cells, divisor), { colour: COLOUR.suggested, size: 3.5 }),
    ],
  });
}

/** Amplitude as opacity, row 0 at the largest v. */
function amplitudePng(seen: Understanding, cells: UvCells, reach: number): Uint8Array {
  const amplitudes = new Float64Array(PIXELS * PIXELS);
  for (let row = 0, at = 0; row < PIXELS; row++) {
    for (let column = 0; column < PIXELS; column++, at++) {
      const u = reach * ((2 * (column + 0.5)) / PIXELS - 1);
      const v = reach * (1 - (2 * (row + 0.5)) / PIXELS);
      const cell = cellOf(seen, cells, u, v);
      amplitudes[at] = cell < 0 ? 0 : Math.sqrt(cells.power[cell]!);
    }
  }
  const most = amplitudes.reduce((high, value) => Math.max(high, value), 0);
  const data = new Uint8Array(PIXELS * PIXELS * 4);
  amplitudes.forEach((amplitude, i) => {
    // The square root shows what is faint beside what is strong.
    const shade = most > 0 ? Math.sqrt(amplitude / most) : 0;
    data.set(SHADE, 4 * i);
    data[4 * i + 3] = Math.round((Math.round(shade * 32) / 32) * 255);
  });
  return encode({ width: PIXELS, height: PIXELS, data, channels: 4, depth: 8 });
}

function cellOf(seen: Understanding, cells: UvCells, u: number, v: number): number {
  const { frame, image } = seen;
  const turn = cyclesY(frame, u, v) < 0 ? -1 : 1;
  const column = Math.round(turn * cyclesX(frame, u, v) * image.width) + (cells.columns >> 1);
  const row = Math.round(turn * cyclesY(frame, u, v) * image.height);
  if (column < 0 || column >= cells.columns || row >= cells.rows) return -1;
  return row * cells.columns + column;
}

/** Cells out of family with their mirror images, in the units of the axes. */
function markedCells(
  { frame, image }: Understanding,
  cells: UvCells,
  divisor: number,
): { x: number[]; y: number[] } {
  const [a, b, c, d] = frame.matrix;
  const determinant = a * d - b * c;
  const marks: { x: number[]; y: number[] } = { x: [], y: [] };
  for (const cell of cells.outliers.subarray(0, MOST_MARKED)) {
    const fx = ((cell % cells.columns) - (cells.columns >> 1)) / image.width;
    const fy = Math.floor(cell / cells.columns) / image.height;
    const u = (d * fx - c * fy) / determinant / divisor;
    const v = (-b * fx + a * fy) / determinant / divisor;
    marks.x.push(u, -u);
    marks.y.push(v, -v);
  }
  return marks;
}
