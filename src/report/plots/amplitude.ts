/** Amplitude against uv distance. */
import { plainTextWithin } from "../../util/terminal.ts";
import type { Check } from "../report.ts";
import { type Cells, FLAGGED, KEPT, SUGGESTED } from "./cells.ts";
import { COLOUR, drawChart } from "./chart.ts";
import { density, dots, type Points } from "./marks.ts";
import { quantileOf } from "./quantile.ts";
import { subbandMiddles } from "./setups.ts";
import { wavelengthUnit } from "./ticks.ts";

const MOST_DOTS = 4000;

/** A logarithmic axis where amplitudes span more than this. */
const LOG_FROM = 30;

export function amplitudeChart(check: Check, cells: Cells): string {
  const { tracks } = check.survey;
  const { subbands, polarizations } = check.dataset.shape;
  const middles = subbandMiddles(check.dataset);
  const byFate: { x: number[]; y: number[] }[] = [KEPT, SUGGESTED, FLAGGED].map(() => ({ x: [], y: [] }));
  let reach = 0;
  for (let cell = 0; cell < tracks.cells; cell++) {
    const points = byFate[cells.fate[cell]!]!;
    const spacing = Math.hypot(tracks.u[cell]!, tracks.v[cell]!);
    for (let subband = 0; subband < subbands; subband++) {
      const distance = spacing * (middles[tracks.setup[cell]!]?.[subband] ?? Number.NaN);
      const amplitude = meanAmplitude(
        tracks.amplitude,
        (cell * subbands + subband) * polarizations,
        polarizations,
      );
      if (!(amplitude > 0) || !Number.isFinite(distance)) continue;
      points.x.push(distance);
      points.y.push(amplitude);
      if (distance > reach) reach = distance;
    }
  }
  const { divisor, name } = wavelengthUnit(reach);
  const all = byFate.flatMap((points) => points.y).sort((a, b) => a - b);
  const largest = all.at(-1) ?? 1;
  const smallest = quantileOf(all, 0.002, largest);
  const log = largest / smallest > LOG_FROM;
  const [low, high] = [smallest * 0.8, largest * 1.25];
  const unit = plainTextWithin(check.dataset.unit, 24) || "uncalibrated";
  const draw = (fate: number, colour: string) => {
    const points = byFate[fate]!;
    const scaled: Points = {
      x: points.x.map((value) => value / divisor),
      y: log ? points.y.map(Math.log10) : points.y,
    };
    if (points.x.length > MOST_DOTS) return density(scaled, { colour, columns: 120, rows: 72 });
    return dots(scaled, { colour, size: fate === SUGGESTED ? 2.5 : 2, opacity: 0.8 });
  };
  return drawChart({
    id: "amplitude",
    label: `amplitude against uv distance, ${log ? "logarithmic" : "linear"} in amplitude`,
    x: {
      domain: [0, reach > 0 ? (reach / divisor) * 1.03 : 1],
      label: `uv distance (${name})`,
      ticks: 6,
      labelArrow: "none",
    },
    y: log
      ? {
          domain: [Math.log10(low), Math.log10(high)],
          ticks: decades(low, high).map(Math.log10),
          tickFormat: (power: number) => plainNumber(10 ** power),
          label: `amplitude (${unit})`,
          grid: true,
          labelArrow: "none",
        }
      : {
          domain: [0, largest * 1.08],
          label: `amplitude (${unit})`,
          grid: true,
          ticks: 5,
          labelArrow: "none",
        },
    marks: [draw(KEPT, COLOUR.kept), draw(SUGGESTED, COLOUR.suggested)],
  });
}

/** Ticks of a logarithmic axis: 1, 2, 5 of each decade where that is not too many, else the decades. */
function decades(low: number, high: number): number[] {
  const ticks: number[] = [];
  for (let power = Math.floor(Math.log10(low)); power <= Math.log10(high); power++) {
    for (const step of [1, 2, 5]) ticks.push(Number(`${step}e${power}`));
  }
  const inside = ticks.filter((tick) => tick >= low && tick <= high);
  return inside.length <= 8 ? inside : inside.filter((tick) => /^1|0\.0*1$/.test(String(tick)));
}

/** `0.01`, `1`, `200`, `1e5`. */
function plainNumber(value: number): string {
  return value >= 1e-3 && value < 1e5
    ? String(Number(value.toPrecision(3)))
    : value.toExponential(0).replace("e+", "e");
}

function meanAmplitude(amplitudes: Float32Array, from: number, count: number): number {
  let [sum, seen] = [0, 0];
  for (let at = from; at < from + count; at++) {
    const amplitude = amplitudes[at]!;
    if (!Number.isFinite(amplitude)) continue;
    sum += amplitude;
    seen += 1;
  }
  return seen === 0 ? Number.NaN : sum / seen;
}
