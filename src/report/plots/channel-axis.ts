/** An axis of channels, the sub-bands side by side. */
import { type Markish, ruleX, type ScaleOptions, text } from "@observablehq/plot";

/** More sub-bands than this go without names over them. */
const MOST_NAMES = 8;

export function channelAxis(subbands: number, channels: number): ScaleOptions {
  const edges = subbandEdges(subbands, channels);
  const one = subbands === 1;
  return {
    domain: [0, subbands * channels],
    label: one ? "channel" : "channel, sub-bands side by side",
    labelArrow: "none",
    ticks: one ? 8 : edges.filter((_, i) => i % Math.ceil(subbands / MOST_NAMES) === 0),
    tickFormat: (at: number) => (one ? String(at) : `${Math.floor(at / channels)}:0`),
  };
}

/** Lines between the sub-bands, and their names above the frame where there is room. */
export function subbandMarks(subbands: number, channels: number): Markish[] {
  const edges = subbandEdges(subbands, channels);
  const lines = ruleX(edges.slice(1), {
    stroke: "currentColor",
    strokeOpacity: 0.35,
    strokeDasharray: "2 3",
  });
  if (subbands === 1 || subbands > MOST_NAMES) return [lines];
  const names = text(edges, {
    x: (at: number) => at + channels / 2,
    frameAnchor: "top",
    dy: -6,
    lineAnchor: "bottom",
    text: (at: number) => (subbands <= 4 ? `sub-band ${at / channels}` : String(at / channels)),
    fill: "var(--muted)",
  });
  return [lines, names];
}

function subbandEdges(subbands: number, channels: number): number[] {
  return Array.from({ length: subbands }, (_, subband) => subband * channels);
}
