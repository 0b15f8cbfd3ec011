/** uv coverage: every baseline with its conjugate, from the lowest to the highest frequency. */
import { type RenderFunction, ruleX, ruleY } from "@observablehq/plot";
import type { Coverage } from "../../imaging/image.ts";
import { formatWavelengths } from "../quantity.ts";
import type { Check } from "../report.ts";
import { type Cells, FLAGGED, KEPT, SUGGESTED } from "./cells.ts";
import { COLOUR, drawChart, SQUARE } from "./chart.ts";
import { segments } from "./marks.ts";
import { node } from "./node.ts";
import { raster } from "./raster.ts";
import { setupRange } from "./setups.ts";
import { wavelengthUnit } from "./ticks.ts";

/** Up to this many cells are drawn one by one, each twice. */
const MOST_SEGMENTS = 3500;

interface Track {
  readonly from: { x: number[]; y: number[] };
  readonly to: { x: number[]; y: number[] };
}

export function uvCoverageChart(check: Check, cells: Cells): string {
  const { survey } = check;
  const { tracks } = survey;
  const ranges = check.dataset.setups.map(setupRange);
  let reach = 0;
  for (let cell = 0; cell < tracks.cells; cell++) {
    const [, high] = ranges[tracks.setup[cell]!] ?? [0, 0];
    const spacing = Math.hypot(tracks.u[cell]!, tracks.v[cell]!) * high;
    if (spacing > reach && Number.isFinite(spacing)) reach = spacing;
  }
  const { divisor, name } = wavelengthUnit(reach);
  const byFate: Track[] = [KEPT, SUGGESTED, FLAGGED].map(() => ({
    from: { x: [], y: [] },
    to: { x: [], y: [] },
  }));
  for (let cell = 0; cell < tracks.cells; cell++) {
    const range = ranges[tracks.setup[cell]!];
    if (range === undefined) continue;
    const { from, to } = byFate[cells.fate[cell]!]!;
    for (const sign of [1, -1]) {
      from.x.push((sign * tracks.u[cell]! * range[0]) / divisor);
      from.y.push((sign * tracks.v[cell]! * range[0]) / divisor);
      to.x.push((sign * tracks.u[cell]! * range[1]) / divisor);
      to.y.push((sign * tracks.v[cell]! * range[1]) / divisor);
    }
  }
  const limit = (reach > 0 ? reach / divisor : 1) * 1.05;
  // What stays lies on top: where a suggested flag shows, nothing else covers the plane.
  const classes = [
    { ...byFate[FLAGGED]!, colour: COLOUR.flagged },
    { ...byFate[SUGGESTED]!, colour: COLOUR.suggested },
    { ...byFate[KEPT]!, colour: COLOUR.kept },
  ];
  const few = tracks.cells <= MOST_SEGMENTS;
  return drawChart({
    id: "uv-coverage",
    label: `uv coverage out to ${formatWavelengths(reach)}`,
    height: SQUARE,
    x: { domain: [-limit, limit], label: `u, east (${name})`, ticks: 5, labelArrow: "none" },
    y: { domain: [-limit, limit], label: `v, north (${name})`, ticks: 5, labelArrow: "none" },
    marks: [
      ruleX([0], { stroke: COLOUR.faint }),
      ruleY([0], { stroke: COLOUR.faint }),
      gaps(check.image.coverage.before, divisor),
      ...(few
        ? classes.map(({ from, to, colour }) => segments(from, to, { colour, size: 1.5 }))
        : [raster(classes)]),
    ],
  });
}

/** The largest gap in radius as a ring, and the widest in direction as two opposite sectors of its annulus. */
function gaps(coverage: Coverage, divisor: number): RenderFunction {
  return (_index, scales, _values, _dimensions, context) => {
    const x = scales.x as (value: number) => number;
    const y = scales.y as (value: number) => number;
    const [middleX, middleY] = [x(0), y(0)];
    const pixels = (wavelengths: number) => Math.abs(x(wavelengths / divisor) - middleX);
    const group = node(context.document, "g", { class: "gap" });
    const draw = (d: string) =>
      group.appendChild(node(context.document, "path", { d, "fill-rule": "evenodd" }));
    if (hasRadialGap(coverage)) {
      const circle = (radius: number) =>
        `M${middleX - radius} ${middleY}a${radius} ${radius} 0 1 0 ${2 * radius} 0a${radius} ${radius} 0 1 0 ${-2 * radius} 0z`;
      draw(
        circle(pixels(coverage.radialGapFromWavelengths)) + circle(pixels(coverage.radialGapToWavelengths)),
      );
    }
    if (hasAzimuthalGap(coverage)) {
      const [inner, outer] = [coverage.azimuthalGapFromWavelengths, coverage.azimuthalGapToWavelengths].map(
        pixels,
      );
      const half = coverage.largestAzimuthalGapRad / 2;
      for (const turn of [0, Math.PI]) {
        const [from, to] = [
          coverage.azimuthalGapAtRad + turn - half,
          coverage.azimuthalGapAtRad + turn + half,
        ];
        // North through east: u is the sine, v the cosine, and v points up.
        const at = (radius: number, angle: number) =>
          `${middleX + radius * Math.sin(angle)} ${middleY - radius * Math.cos(angle)}`;
        const large = 2 * half > Math.PI ? 1 : 0;
        draw(
          `M${at(inner!, from)}L${at(outer!, from)}A${outer} ${outer} 0 ${large} 1 ${at(outer!, to)}` +
            `L${at(inner!, to)}A${inner} ${inner} 0 ${large} 0 ${at(inner!, from)}z`,
        );
      }
    }
    return group;
  };
}

export function hasRadialGap({
  radialGapFromWavelengths: from,
  radialGapToWavelengths: to,
}: Coverage): boolean {
  return Number.isFinite(from) && Number.isFinite(to) && to > from;
}

export function hasAzimuthalGap(coverage: Coverage): boolean {
  const { azimuthalGapFromWavelengths: from, azimuthalGapToWavelengths: to } = coverage;
  return coverage.largestAzimuthalGapRad > 0 && Number.isFinite(from) && to > from;
}
