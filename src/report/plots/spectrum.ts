/** Amplitude against channel: what stands out of the band on most baselines, or on some. */
import { gridY, rectY } from "@observablehq/plot";
import { plainTextWithin } from "../../util/terminal.ts";
import type { Check } from "../report.ts";
import { amplitudeScale } from "./amplitude-scale.ts";
import { channelAxis, subbandMarks } from "./channel-axis.ts";
import { COLOUR, drawChart, MARGIN } from "./chart.ts";
import type { ChannelShare } from "./flagged.ts";
import { dots, hatching } from "./marks.ts";
import { quantileOf } from "./quantile.ts";

/** Channels drawn one by one up to this many; above, each dot is the loudest of its neighbours. */
const MOST_DOTS = 2000;

export interface Spectrum {
  /** (subbands x channels) over the baselines' medians: their median, and what a tenth exceed; NaN where unknown */
  readonly median: Float64Array;
  readonly high: Float64Array;
  /** the channel whose median is furthest above the median channel, and how many times */
  readonly loudest: { readonly channel: number; readonly ratio: number } | null;
}

/** null where there is one channel only, or nothing is usable. */
export function spectrumOf(check: Check): Spectrum | null {
  const { subbands, channels, polarizations } = check.dataset.shape;
  const { levels, baselines } = check.survey;
  const all = subbands * channels;
  if (all < 2) return null;
  const median = new Float64Array(all).fill(Number.NaN);
  const high = new Float64Array(all).fill(Number.NaN);
  for (let channel = 0; channel < all; channel++) {
    const values: number[] = [];
    for (let baseline = 0; baseline < baselines.length; baseline++) {
      const from = (baseline * all + channel) * polarizations;
      for (let at = from; at < from + polarizations; at++) {
        const value = levels.median[at]!;
        if (levels.count[at]! > 0 && value > 0 && Number.isFinite(value)) values.push(value);
      }
    }
    if (values.length === 0) continue;
    values.sort((a, b) => a - b);
    median[channel] = quantileOf(values, 0.5, Number.NaN);
    high[channel] = quantileOf(values, 0.9, Number.NaN);
  }
  const sorted = Array.from(median)
    .filter(Number.isFinite)
    .sort((a, b) => a - b);
  if (sorted.length === 0) return null;
  const typical = quantileOf(sorted, 0.5, Number.NaN);
  const channel = median.indexOf(sorted.at(-1)!);
  return { median, high, loudest: { channel, ratio: sorted.at(-1)! / typical } };
}

/** Most of the channel is in a suggested flag. */
export function isTaken(share: ChannelShare): boolean {
  return share.suggested > 0.5 * (1 - share.flagged) && share.suggested > 0;
}

export function spectrumChart(check: Check, spectrum: Spectrum, shares: readonly ChannelShare[]): string {
  const { subbands, channels } = check.dataset.shape;
  const step = Math.max(1, Math.ceil(spectrum.median.length / MOST_DOTS));
  const loudest = (values: Float64Array) => {
    const points: { x: number[]; y: number[] } = { x: [], y: [] };
    for (let first = 0; first < values.length; first += step) {
      const some = values.subarray(first, first + step).filter(Number.isFinite);
      if (some.length === 0) continue;
      points.x.push(first + step / 2);
      points.y.push(Math.max(...some));
    }
    return points;
  };
  const [middle, upper] = [loudest(spectrum.median), loudest(spectrum.high)];
  const scale = amplitudeScale(
    [...middle.y, ...upper.y],
    `amplitude (${plainTextWithin(check.dataset.unit, 24) || "uncalibrated"})`,
  );
  const [bottom, top] = scale.options.domain;
  const size = Math.max(1.6, Math.min(4, 200 / middle.x.length));
  const taken = takenRanges(shares).map(([from, to]) => ({ from, to }));
  return drawChart({
    id: "spectrum",
    label: `median amplitude against channel, ${subbands} sub-bands of ${channels} channels`,
    x: channelAxis(subbands, channels),
    y: scale.options,
    marginTop: MARGIN.top + 16,
    marks: [
      hatching("spectrum-hatch", COLOUR.suggested),
      rectY(taken, {
        x1: "from",
        x2: "to",
        y1: bottom,
        y2: top,
        fill: "url(#spectrum-hatch)",
        fillOpacity: 0.45,
      }),
      gridY({ ticks: scale.options.ticks }),
      ...subbandMarks(subbands, channels),
      dots({ x: upper.x, y: upper.y.map(scale.place) }, { colour: COLOUR.limit, size }),
      dots({ x: middle.x, y: middle.y.map(scale.place) }, { colour: COLOUR.kept, size: size + 0.6 }),
    ],
  });
}

/** [first, last) of runs of channels that are mostly suggested for flagging. */
function takenRanges(shares: readonly ChannelShare[]): [number, number][] {
  const ranges: [number, number][] = [];
  for (const [channel, share] of shares.entries()) {
    if (!isTaken(share)) continue;
    const last = ranges.at(-1);
    if (last !== undefined && last[1] === channel) last[1] = channel + 1;
    else ranges.push([channel, channel + 1]);
  }
  return ranges;
}
