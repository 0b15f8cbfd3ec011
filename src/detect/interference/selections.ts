/** Features as selections. */
import type { Selection } from "../../dataset/selection.ts";
import { EVERYTHING } from "../../dataset/selection.ts";
import type { Feature } from "./features.ts";
import type { Grid, Rectangle } from "./grid.ts";

/** One selection a rectangle, or several where it crosses sub-bands. */
export function selectionsOf(grid: Grid, { rectangles, who }: Feature): Selection[] {
  return rectangles.flatMap((rectangle) => {
    const base = { ...whoPart(grid, who), time: timePart(grid, rectangle) };
    return columnsPart(grid, rectangle.low, rectangle.high).map((part) => ({ ...base, ...part }));
  });
}

/** The smallest selection that holds a feature. */
export function scopeOf(grid: Grid, feature: Feature): Selection {
  const { rectangles, who } = feature;
  const bounds: Rectangle = {
    firstStep: Math.min(...rectangles.map(({ firstStep }) => firstStep)),
    lastStep: Math.max(...rectangles.map(({ lastStep }) => lastStep)),
    low: Math.min(...rectangles.map(({ low }) => low)),
    high: Math.max(...rectangles.map(({ high }) => high)),
  };
  const parts = columnsPart(grid, bounds.low, bounds.high);
  const part =
    parts.length === 1
      ? parts[0]!
      : { subbands: [...new Set(parts.flatMap(({ subbands }) => subbands ?? []))], channels: null };
  return { ...whoPart(grid, who), time: timePart(grid, bounds), ...part };
}

function timePart(grid: Grid, { firstStep, lastStep }: Rectangle): Selection["time"] {
  return firstStep === 0 && lastStep === grid.steps - 1 ? null : grid.timeRange(firstStep, lastStep);
}

function whoPart(grid: Grid, who: Feature["who"]): Selection {
  const { baselines, dataset } = grid.survey;
  const { subset, antenna } = who;
  return {
    ...EVERYTHING,
    antennas: antenna === null ? null : [antenna],
    baselines:
      antenna !== null || subset.baselines === null
        ? null
        : baselines
            .filter((_, b) => subset.baselines![b] === 1)
            .map(({ antenna1, antenna2 }) => [antenna1, antenna2] as const),
    polarizations:
      subset.polarizations === null
        ? null
        : dataset.polarizations.filter((_, p) => subset.polarizations![p] === 1),
  };
}

/** Columns counted over all sub-bands, as channels within each. */
function columnsPart(grid: Grid, low: number, high: number): Pick<Selection, "subbands" | "channels">[] {
  const { subbands, channels } = grid.survey.dataset.shape;
  const parts: { subbands: number[] | null; channels: (readonly [number, number])[] | null }[] = [];
  for (let subband = Math.floor(low / channels); subband <= Math.floor(high / channels); subband++) {
    const from = Math.max(0, low - subband * channels);
    const to = Math.min(channels - 1, high - subband * channels);
    const range = from === 0 && to === channels - 1 ? null : ([[from, to]] as const).slice();
    const last = parts[parts.length - 1];
    if (range === null && last !== undefined && last.channels === null) last.subbands!.push(subband);
    else parts.push({ subbands: [subband], channels: range });
  }
  if (subbands === 1) for (const part of parts) part.subbands = null;
  return parts;
}
