/** Features that are one thing: in the same channels again and again, or in the same place on several baselines. */

import type { Feature } from "./features.ts";
import { addCounts, noCounts } from "./grid.ts";

/** Channels by which the edges of what recurs may differ. */
const SLACK = 1;
/** Share of the time from the first to the last that recurring features fill, from which on they are one line. */
const RECURRING = 0.5;
/** Fewer bursts than this in the same channels are told one by one: each is at its own time. */
const FEWEST_RECURRING = 3;

/** Join features of the same band, subset, and about the same channels into one with many rectangles. */
export function groupInTime(features: readonly Feature[], steps: number): Feature[] {
  const groups: Feature[][] = [];
  for (const feature of features) {
    const group = feature.kind === "drifting-line" ? undefined : groups.find((g) => recurs(g[0]!, feature));
    if (group === undefined) groups.push([feature]);
    else group.push(feature);
  }
  return groups.flatMap((group) => {
    if (group.length === 1) return group;
    const one = joined(group, steps);
    return group.length >= FEWEST_RECURRING || one.kind === "persistent-line" ? [one] : group;
  });
}

function recurs(a: Feature, b: Feature): boolean {
  if (a.kind === "drifting-line" || a.band !== b.band) return false;
  if (!sameSubset(a, b)) return false;
  const [aLow, aHigh] = channelsOf(a);
  const [bLow, bHigh] = channelsOf(b);
  return Math.abs(aLow - bLow) <= SLACK && Math.abs(aHigh - bHigh) <= SLACK;
}

function joined(group: readonly Feature[], steps: number): Feature {
  const first = group[0]!;
  const rectangles = group
    .flatMap((feature) => feature.rectangles)
    .sort((a, b) => a.firstStep - b.firstStep || a.low - b.low);
  const counts = noCounts();
  for (const feature of group) {
    addCounts(counts, feature.counts);
  }
  const filled = rectangles.reduce((sum, r) => sum + r.lastStep - r.firstStep + 1, 0);
  return {
    ...first,
    kind: filled >= RECURRING * steps ? "persistent-line" : first.kind,
    rectangles,
    counts,
    significance: Math.hypot(...group.map(({ significance }) => significance)),
  };
}

/** Lowest and highest column of a feature. */
export function channelsOf({ rectangles }: Feature): [number, number] {
  return [Math.min(...rectangles.map(({ low }) => low)), Math.max(...rectangles.map(({ high }) => high))];
}

function sameSubset(a: Feature, b: Feature): boolean {
  return (
    a.who.kind === b.who.kind &&
    String(a.who.subset.baselines) === String(b.who.subset.baselines) &&
    String(a.who.subset.polarizations) === String(b.who.subset.polarizations)
  );
}
