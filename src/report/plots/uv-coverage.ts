/** uv coverage: every baseline with its conjugate, from the lowest to the highest frequency. */
import { ruleX, ruleY } from "@observablehq/plot";
import { formatWavelengths } from "../quantity.ts";
import type { Check } from "../report.ts";
import { type Cells, FLAGGED, KEPT, SUGGESTED, someCells } from "./cells.ts";
import { COLOUR, drawChart, SQUARE } from "./chart.ts";
import { segments } from "./marks.ts";
import { setupRange } from "./setups.ts";
import { wavelengthUnit } from "./ticks.ts";

/** Cells drawn, each twice. */
const MOST = 3500;

interface Track {
  readonly from: { x: number[]; y: number[] };
  readonly to: { x: number[]; y: number[] };
}

export function uvCoverageChart(check: Check, cells: Cells): string {
  const { survey } = check;
  const { tracks } = survey;
  const ranges = check.dataset.setups.map(setupRange);
  const chosen = someCells(survey, MOST);
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
  for (const cell of chosen) {
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
  const draw = (fate: number, colour: string) =>
    segments(byFate[fate]!.from, byFate[fate]!.to, { colour, size: 1.5 });
  return drawChart({
    id: "uv-coverage",
    label: `uv coverage out to ${formatWavelengths(reach)}`,
    height: SQUARE,
    x: { domain: [-limit, limit], label: `u, east (${name})`, ticks: 5, labelArrow: "none" },
    y: { domain: [-limit, limit], label: `v, north (${name})`, ticks: 5, labelArrow: "none" },
    marks: [
      ruleX([0], { stroke: COLOUR.faint }),
      ruleY([0], { stroke: COLOUR.faint }),
      draw(FLAGGED, COLOUR.flagged),
      draw(KEPT, COLOUR.kept),
      draw(SUGGESTED, COLOUR.suggested),
    ],
  });
}
