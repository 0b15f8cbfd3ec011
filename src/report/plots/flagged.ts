/** How much of each antenna's and each channel's samples is flagged already, not finite, or suggested for flagging. */
import { barY, gridY, rectY } from "@observablehq/plot";
import { plainTextWithin } from "../../util/terminal.ts";
import type { Check } from "../report.ts";
import type { ScopeWords } from "../scope.ts";
import { displayWidth } from "../text/width.ts";
import type { Cells, Fate } from "./cells.ts";
import { channelAxis, subbandMarks } from "./channel-axis.ts";
import { COLOUR, drawChart, MARGIN } from "./chart.ts";
import { hatching } from "./marks.ts";

const PERCENT_AXIS = {
  domain: [0, 100],
  label: "share of samples (%)",
  labelArrow: "none",
  ticks: 5,
} as const;

/** Longest name under a bar. */
const NAME = 9;

/** Channels drawn one by one up to this many; above, each bar is the worst of its neighbours. */
const MOST_BARS = 240;

export function flaggedByAntennaChart(check: Check, cells: Cells, words: ScopeWords): string {
  const bars = check.dataset.array.antennas.flatMap(({ number }) => {
    const fate = cells.antennas.get(number);
    return fate === undefined
      ? []
      : [{ number, name: plainTextWithin(words.antenna(number), NAME), ...shares(fate) }];
  });
  const stacked = bars.flatMap((bar) => stack(bar.number, [bar.flagged, bar.bad, bar.suggested]));
  const every = Math.max(1, Math.ceil(bars.length / 40));
  const upright = bars.length <= 10;
  const room = 34 + 7 * Math.max(0, ...bars.map((bar) => displayWidth(bar.name)));
  const names = new Map(bars.map((bar) => [bar.number, bar.name]));
  return drawChart({
    id: "flagged-antenna",
    label: `share of samples flagged by antenna, ${bars.length} antennas`,
    marginBottom: upright ? MARGIN.bottom : room,
    x: {
      type: "band",
      domain: bars.map((bar) => bar.number),
      label: "antenna",
      labelArrow: "none",
      labelOffset: (upright ? MARGIN.bottom : room) - 4,
      padding: 0.2,
      ticks: bars.filter((_, i) => i % every === 0).map((bar) => bar.number),
      tickFormat: (number: number) => names.get(number) ?? "",
      tickRotate: upright ? 0 : -90,
      tickSize: 0,
    },
    y: PERCENT_AXIS,
    marks: [
      hatching("flagged-antenna-hatch", COLOUR.suggested),
      gridY({ ticks: 5 }),
      barY(stacked, {
        x: "at",
        y1: "from",
        y2: "to",
        fill: (bar: Bar) => fillOf(bar.kind, "flagged-antenna-hatch"),
      }),
    ],
  });
}

export function flaggedByChannelChart(check: Check, bars: readonly ChannelShare[]): string {
  const { subbands, channels } = check.dataset.shape;
  const step = Math.max(1, Math.ceil(bars.length / MOST_BARS));
  const stacked: WideBar[] = [];
  for (let first = 0; first < bars.length; first += step) {
    const some = bars.slice(first, first + step);
    const flagged = Math.max(...some.map((bar) => bar.flagged));
    const suggested = Math.min(1 - flagged, Math.max(...some.map((bar) => bar.suggested)));
    for (const bar of stack(first, [flagged, 0, suggested])) join(stacked, { ...bar, width: some.length });
  }
  return drawChart({
    id: "flagged-channel",
    label: `share of samples flagged by channel, ${subbands} sub-bands of ${channels} channels`,
    x: channelAxis(subbands, channels),
    marginTop: MARGIN.top + 16,
    y: PERCENT_AXIS,
    marks: [
      hatching("flagged-channel-hatch", COLOUR.suggested),
      gridY({ ticks: 5 }),
      rectY(stacked, {
        x1: "at",
        x2: (bar: WideBar) => bar.at + bar.width,
        y1: "from",
        y2: "to",
        fill: (bar: Bar) => fillOf(bar.kind, "flagged-channel-hatch"),
        inset: 0,
      }),
      ...subbandMarks(subbands, channels),
    ],
  });
}

interface WideBar extends Bar {
  /** channels */
  readonly width: number;
}

/** Neighbours that are alike become one bar: many small ones show seams. */
function join(bars: WideBar[], bar: WideBar): void {
  const i = bars.findLastIndex(({ kind }) => kind === bar.kind);
  const last = bars[i];
  const alike =
    last !== undefined && last.at + last.width === bar.at && last.from === bar.from && last.to === bar.to;
  if (alike) bars[i] = { ...last, width: last.width + bar.width };
  else bars.push(bar);
}

type Kind = "flagged" | "bad" | "suggested";

interface Bar {
  readonly at: number;
  readonly kind: Kind;
  /** per cent */
  readonly from: number;
  readonly to: number;
}

/** Bars on top of each other; those of nothing are left out. */
function stack(at: number, fractions: readonly [number, number, number]): Bar[] {
  const bars: Bar[] = [];
  let from = 0;
  for (const [i, kind] of (["flagged", "bad", "suggested"] as const).entries()) {
    const to = from + 100 * fractions[i]!;
    if (to > from) bars.push({ at, kind, from, to });
    from = to;
  }
  return bars;
}

function fillOf(kind: Kind, hatch: string): string {
  return kind === "suggested" ? `url(#${hatch})` : kind === "flagged" ? COLOUR.flagged : COLOUR.bad;
}

export interface Shares {
  readonly flagged: number;
  readonly bad: number;
  readonly suggested: number;
}

export function shares(fate: Fate): Shares {
  const all = fate.kept + fate.suggested + fate.flagged + fate.bad;
  const share = (count: number) => (all > 0 ? count / all : 0);
  return { flagged: share(fate.flagged), bad: share(fate.bad), suggested: share(fate.suggested) };
}

export interface ChannelShare {
  readonly flagged: number;
  readonly suggested: number;
}

/** (subbands x channels) share that is not usable, and share that the suggested flags would take of the rest. */
export function channelShares(check: Check, cells: Cells): ChannelShare[] {
  const { survey, dataset } = check;
  const { subbands, channels, polarizations } = dataset.shape;
  const { count } = survey.levels;
  const total = survey.totals.rows * cells.present.filter(Boolean).length;
  return Array.from({ length: subbands * channels }, (_, channel) => {
    let usable = 0;
    for (let baseline = 0; baseline < survey.baselines.length; baseline++) {
      const from = (baseline * subbands * channels + channel) * polarizations;
      for (let at = from; at < from + polarizations; at++) usable += count[at] ?? 0;
    }
    const kept = total > 0 ? Math.min(1, usable / total) : 0;
    return { flagged: 1 - kept, suggested: kept * cells.channelCover[channel]! };
  });
}
