/** |w| against uv distance, with the |w| that the planned field allows. */
import { ruleY, text } from "@observablehq/plot";
import { formatNumber } from "../../util/units.ts";
import { formatWavelengths } from "../quantity.ts";
import type { Check } from "../report.ts";
import { type Cells, FLAGGED, KEPT, SUGGESTED } from "./cells.ts";
import { COLOUR, drawChart } from "./chart.ts";
import { dots, type Points } from "./marks.ts";
import { raster } from "./raster.ts";
import { setupRange } from "./setups.ts";
import { wavelengthUnit } from "./ticks.ts";

/** Up to this many cells are drawn one by one. */
const MOST_DOTS = 5000;

/** Largest |w| that keeps the phase at the edge of the planned field within the limit, wavelengths. */
export function largestAllowedW(check: Check): number {
  const edge = check.plan.fieldOfView.value / 2;
  // 1 - cos as 2 sin^2 of the half: the subtraction would lose its digits at arcminutes.
  const depth = 2 * Math.sin(edge / 2) ** 2;
  return check.image.wTerm.phaseLimitRad / (2 * Math.PI * depth);
}

export function wDistanceChart(check: Check, cells: Cells): string {
  const { tracks } = check.survey;
  const high = check.dataset.setups.map((setup) => setupRange(setup)[1]);
  const byFate: { x: number[]; y: number[] }[] = [KEPT, SUGGESTED, FLAGGED].map(() => ({ x: [], y: [] }));
  let [reach, top] = [0, 0];
  for (let cell = 0; cell < tracks.cells; cell++) {
    const frequency = high[tracks.setup[cell]!] ?? Number.NaN;
    const spacing = Math.hypot(tracks.u[cell]!, tracks.v[cell]!) * frequency;
    const w = Math.abs(tracks.w[cell]!) * frequency;
    if (!Number.isFinite(spacing) || !Number.isFinite(w)) continue;
    byFate[cells.fate[cell]!]!.x.push(spacing);
    byFate[cells.fate[cell]!]!.y.push(w);
    if (spacing > reach) reach = spacing;
    if (w > top) top = w;
  }
  const allowed = largestAllowedW(check);
  const shown = Number.isFinite(allowed) && allowed <= Math.max(top * 2, 1e-9);
  const ceiling = 1.08 * Math.max(top, shown ? allowed : 0, 1e-9);
  const across = wavelengthUnit(reach);
  const up = wavelengthUnit(ceiling);
  const scaled = (points: Points): Points => ({
    x: Array.from(points.x, (value) => value / across.divisor),
    y: Array.from(points.y, (value) => value / up.divisor),
  });
  const classes = [
    { ...scaled(byFate[FLAGGED]!), colour: COLOUR.flagged },
    { ...scaled(byFate[KEPT]!), colour: COLOUR.kept },
    { ...scaled(byFate[SUGGESTED]!), colour: COLOUR.suggested },
  ];
  const few = tracks.cells <= MOST_DOTS;
  const degrees = formatNumber((check.image.wTerm.phaseLimitRad * 180) / Math.PI);
  return drawChart({
    id: "w-distance",
    label: `|w| against uv distance; |w| reaches ${formatWavelengths(top)}`,
    x: {
      domain: [0, Math.max(reach / across.divisor, 1e-9) * 1.03],
      label: `uv distance (${across.name})`,
      ticks: 6,
      labelArrow: "none",
    },
    y: {
      domain: [0, ceiling / up.divisor],
      label: `|w| (${up.name})`,
      ticks: 5,
      labelArrow: "none",
      grid: true,
    },
    marks: [
      ...(few
        ? classes.map(({ x, y, colour }) => dots({ x, y }, { colour, size: 2 }))
        : [raster(classes.map(({ x, y, colour }) => ({ from: { x, y }, to: { x, y }, colour })))]),
      ...(shown
        ? [
            ruleY([allowed / up.divisor], { stroke: COLOUR.limit, strokeWidth: 2, strokeDasharray: "6 4" }),
            text([`limit: ${degrees} deg at the edge`], {
              frameAnchor: "right",
              y: () => allowed / up.divisor,
              dx: -4,
              dy: -5,
              lineAnchor: "bottom",
              fill: "var(--limit-text)",
              stroke: "var(--surface)",
              strokeWidth: 4,
            }),
          ]
        : []),
    ],
  });
}
