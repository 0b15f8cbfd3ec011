/** Amplitude against uv distance. */
import { parallelProducts } from "../../measure/tables/products.ts";
import { plainTextWithin } from "../../util/terminal.ts";
import type { Check } from "../report.ts";
import { amplitudeScale } from "./amplitude-scale.ts";
import { type Cells, FLAGGED, KEPT, SUGGESTED, someCells } from "./cells.ts";
import { COLOUR, drawChart } from "./chart.ts";
import { density, dots, type Points } from "./marks.ts";
import { subbandMiddles } from "./setups.ts";
import { wavelengthUnit } from "./ticks.ts";

const MOST_DOTS = 4000;

/** Points looked at: a density of more looks no different. */
const MOST_POINTS = 300_000;

export function amplitudeChart(check: Check, cells: Cells): string {
  const { tracks } = check.survey;
  const { subbands, polarizations } = check.dataset.shape;
  const parallel = parallelProducts(check.dataset.polarizations);
  const middles = subbandMiddles(check.dataset);
  const byFate: { x: number[]; y: number[] }[] = [KEPT, SUGGESTED, FLAGGED].map(() => ({ x: [], y: [] }));
  let reach = 0;
  for (const cell of someCells(check.survey, Math.ceil(MOST_POINTS / subbands))) {
    const points = byFate[cells.fate[cell]!]!;
    const spacing = Math.hypot(tracks.u[cell]!, tracks.v[cell]!);
    for (let subband = 0; subband < subbands; subband++) {
      const distance = spacing * (middles[tracks.setup[cell]!]?.[subband] ?? Number.NaN);
      const amplitude = meanAmplitude(
        tracks.amplitude,
        (cell * subbands + subband) * polarizations,
        parallel,
      );
      if (!(amplitude > 0) || !Number.isFinite(distance)) continue;
      points.x.push(distance);
      points.y.push(amplitude);
      if (distance > reach) reach = distance;
    }
  }
  const { divisor, name } = wavelengthUnit(reach);
  const unit = plainTextWithin(check.dataset.unit, 24) || "uncalibrated";
  const scale = amplitudeScale(
    byFate.flatMap((points) => points.y),
    `amplitude (${unit})`,
  );
  const draw = (fate: number, colour: string) => {
    const points = byFate[fate]!;
    const scaled: Points = {
      x: points.x.map((value) => value / divisor),
      y: points.y.map(scale.place),
    };
    if (points.x.length > MOST_DOTS) return density(scaled, { colour });
    return dots(scaled, { colour, size: fate === SUGGESTED ? 2.5 : 2, opacity: 0.8 });
  };
  return drawChart({
    id: "amplitude",
    label: `amplitude against uv distance, ${scale.log ? "logarithmic" : "linear"} in amplitude`,
    x: {
      domain: [0, reach > 0 ? (reach / divisor) * 1.03 : 1],
      label: `uv distance (${name})`,
      ticks: 6,
      labelArrow: "none",
    },
    y: scale.options,
    marks: [draw(KEPT, COLOUR.kept), draw(SUGGESTED, COLOUR.suggested)],
  });
}

/** Mean of the products that carry the total intensity. */
function meanAmplitude(amplitudes: Float32Array, from: number, parallel: readonly boolean[]): number {
  let [sum, seen] = [0, 0];
  for (const [product, counts] of parallel.entries()) {
    const amplitude = amplitudes[from + product]!;
    if (!counts || !Number.isFinite(amplitude)) continue;
    sum += amplitude;
    seen += 1;
  }
  return seen === 0 ? Number.NaN : sum / seen;
}
