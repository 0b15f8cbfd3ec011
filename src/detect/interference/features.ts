/** Features of interference: rectangles of integrations by channels, with those whom they hit. */
import type { Band } from "../pass/bands.ts";
import { growMarks } from "../statistics/growth.ts";
import { broadbandBursts } from "./broadband.ts";
import { area, boundsOf, coverOf, linesOf, type Region, regionsOf, shifted } from "./components.ts";
import { settleAll } from "./edges.ts";
import { Finder } from "./find.ts";
import { type Counts, type Grid, noCounts, type Rectangle } from "./grid.ts";
import { refined } from "./refine.ts";
import { everyone, likelihood, type Who, whoIsHit } from "./subset.ts";
import { sumsOf } from "./sums.ts";

export type FeatureKind = "persistent-line" | "burst" | "drifting-line";

export interface Feature {
  readonly kind: FeatureKind;
  readonly band: Band;
  readonly rectangles: readonly Rectangle[];
  readonly who: Who;
  readonly counts: Counts;
  /** in sigmas: the square root of twice the log likelihood ratio against noise */
  readonly significance: number;
  /** power of the noise over the usual, of a burst that fills the band */
  readonly raised?: number;
  /** sigmas of one component a sample, where it is known otherwise than from counts */
  readonly amplitude?: number;
}

/**
 * Fewer elevated samples than this share of a feature's are the background's fault: it may fit some baselines badly, hardly
 * all of them alike.
 */
const LEAST_ELEVATED = 0.12;
const LEAST_ELEVATED_OF_SHORT = 0.16;
const LEAST_ELEVATED_OF_ANTENNA = 0.35;
/** A few baselines alone: nearly everything must stand out, in few pieces, as it does in interference and not in misfits. */
const LEAST_ELEVATED_OF_LISTED = 0.9;
const MOST_PIECES_OF_LISTED = 4;
const LEAST: Readonly<Record<Who["kind"], number>> = {
  all: LEAST_ELEVATED,
  short: LEAST_ELEVATED_OF_SHORT,
  antenna: LEAST_ELEVATED_OF_ANTENNA,
  listed: LEAST_ELEVATED_OF_LISTED,
};
/** A feature must be this sure, sigmas. */
const LEAST_SIGNIFICANCE = 7;
/** Fainter sums over baselines, in sigmas a sample, are the background's fault. */
const LEAST_AMPLITUDE = 0.9;
const LEAST_SIGNIFICANCE_OF_SOME = 12;
const MOST_REGIONS = 256;
/** Share of an interval that rank-based growth fills. */
const GROWTH = 0.2;
/** A feature this long in time, as a share of the observation, and this narrow, is a line. */
const LINE_DURATION = 0.4;
const LINE_WIDTH = 0.15;
/** A drifting line moves over this many channels, with this correlation of channel and time. */
const DRIFT_CHANNELS = 3;
const DRIFT_CORRELATION = 0.9;
/** Of what one baseline alone sees: shares of the samples that must stand out, and how many samples at least. */
const ALONE_OUTLYING = 0.5;
const ALONE_BRIGHT = 0.05;
const ALONE_SAMPLES = 8;
const ALONE_SIGNIFICANCE = 16;
/** Channels within which a feature lies beside another. */
const BESIDE = 2;

/** Everything that stands out in a band; takes it out of the grid's marks. */
export function featuresOf(grid: Grid, band: Band): Feature[] {
  const { mask, persistent } = new Finder(grid.pass).find(band);
  const features: Feature[] = [];
  for (const burst of broadbandBursts(grid, band)) {
    const { firstStep, lastStep, ratio, significance } = burst;
    const rectangle = { firstStep, lastStep, low: band.first, high: band.first + band.columns - 1 };
    const feature = weigh(grid, band, "burst", [rectangle], everyone(grid));
    features.push({ ...feature, significance, raised: ratio, amplitude: Math.sqrt(2 * (ratio - 1)) });
    take(grid, feature, mask);
  }
  for (const [low, high] of runsOf(persistent)) {
    const rectangle = shifted({ firstStep: 0, lastStep: grid.steps - 1, low, high }, band);
    const feature = settle(grid, band, "persistent-line", [rectangle]);
    if (feature === null) continue;
    features.push(feature);
    take(grid, feature, mask);
  }
  if (grid.pass.marks !== null) grow(mask, grid.steps, band.columns);
  for (const rough of regionsOf(mask, grid.steps, band.columns).slice(0, MOST_REGIONS)) {
    const region = refined(grid, band, rough);
    if (region.length === 0) continue;
    const rectangles = coverOf(region, band.columns).map((r) => shifted(r, band));
    const feature = settle(grid, band, kindOf(region, band.columns, grid.steps), rectangles);
    if (feature === null) continue;
    features.push(feature);
    take(grid, feature, null);
  }
  return features;
}

/** What lies between and beside marks may be what they are: the samples of those hit decide afterwards. */
function grow(mask: Uint8Array, steps: number, columns: number): void {
  for (let c = 0; c < columns; c++) growMarks(mask, c, columns, steps, GROWTH);
  for (let step = 0; step < steps; step++) growMarks(mask, step * columns, 1, columns, GROWTH);
}

/**
 * What stands out on single baselines and is left when the features of many are taken out.
 * @param known those of many: what lies beside one of them is a background bent by it
 */
export function featuresOfBaselines(grid: Grid, band: Band, known: readonly Feature[]): Feature[] {
  const { marks } = grid.pass;
  const { tracks, baselines } = grid.survey;
  if (marks === null) return [];
  const features: Feature[] = [];
  const { columns } = band;
  const mask = new Uint8Array(grid.steps * columns);
  const firstSample = band.first * grid.polarizations;
  const lastSample = (band.first + columns) * grid.polarizations;
  for (let baseline = 0; baseline < baselines.length; baseline++) {
    mask.fill(0);
    let some = 0;
    for (let cell = tracks.firstCell[baseline]!; cell < tracks.firstCell[baseline + 1]!; cell++) {
      const at = grid.stepOfCell[cell]! * columns - band.first;
      marks.outlying.each(cell, firstSample, lastSample, (sample) => {
        mask[at + Math.floor(sample / grid.polarizations)] = 1;
        some += 1;
      });
    }
    if (some < ALONE_SAMPLES) continue;
    const only = new Uint8Array(baselines.length);
    only[baseline] = 1;
    const who: Who = {
      subset: { baselines: only, polarizations: null },
      kind: "listed",
      antenna: null,
      baselines: 1,
      shorterThan: Number.NaN,
    };
    for (const region of regionsOf(mask, grid.steps, columns).slice(0, MOST_REGIONS)) {
      if (region.length * grid.polarizations < ALONE_SAMPLES) break;
      const cover = coverOf(region, columns).map((r) => shifted(r, band));
      const rectangles = settleAll(grid, cover, who.subset, band);
      const feature = weigh(grid, band, kindOf(region, columns, grid.steps), rectangles, who);
      const { usable, outlying, bright } = feature.counts;
      const sure =
        feature.significance > ALONE_SIGNIFICANCE &&
        feature.counts.elevated >= LEAST_ELEVATED_OF_LISTED * usable &&
        rectangles.length <= MOST_PIECES_OF_LISTED &&
        outlying >= ALONE_SAMPLES &&
        outlying >= ALONE_OUTLYING * usable &&
        bright >= ALONE_BRIGHT * usable;
      if (!sure || isBeside(feature, known) || isAtEnd(feature, band)) continue;
      features.push(feature);
      take(grid, feature, null);
    }
  }
  return features;
}

/** Whether one of a feature's rectangles touches one of the others, in channels and in time. */
function isBeside({ rectangles }: Feature, others: readonly Feature[]): boolean {
  const touches = (a: Rectangle, b: Rectangle) =>
    a.firstStep <= b.lastStep + 1 &&
    b.firstStep <= a.lastStep + 1 &&
    a.low <= b.high + BESIDE &&
    b.low <= a.high + BESIDE;
  return rectangles.some((own) =>
    others.some((other) => other.rectangles.some((rectangle) => touches(own, rectangle))),
  );
}

/** Whether a feature reaches an end of the band, where a background that does not fit is off most. */
function isAtEnd({ rectangles }: Feature, { first, columns }: Band): boolean {
  return rectangles.some(({ low, high }) => low === first || high === first + columns - 1);
}

function settle(grid: Grid, band: Band, kind: FeatureKind, rectangles: readonly Rectangle[]): Feature | null {
  let settled = rectangles;
  let who = whoIsHit(grid, settled);
  if (kind !== "persistent-line") {
    settled = settleAll(grid, settled, who.subset, band);
    who = whoIsHit(grid, settled);
  }
  if (grid.pass.marks === null) return bySums(grid, band, kind, settled, who);
  const feature = weigh(grid, band, kind, settled, who);
  const { usable, elevated } = feature.counts;
  const least = LEAST[who.kind];
  if (who.kind === "listed" && (settled.length > MOST_PIECES_OF_LISTED || isAtEnd(feature, band)))
    return null;
  if (usable === 0 || elevated < least * usable) return null;
  const sure = who.kind === "all" ? LEAST_SIGNIFICANCE : LEAST_SIGNIFICANCE_OF_SOME;
  return feature.significance < sure ? null : feature;
}

function weigh(
  grid: Grid,
  band: Band,
  kind: FeatureKind,
  rectangles: readonly Rectangle[],
  who: Who,
): Feature {
  const counts = noCounts();
  for (const rectangle of rectangles) grid.count(rectangle, who.subset, [counts], () => 0);
  const gain = likelihood(counts, counts.elevated / Math.max(1, counts.usable));
  return { kind, band, rectangles, who, counts, significance: Math.sqrt(Math.max(0, 2 * gain)) };
}

/** Who is hit cannot be told from the sums: all are taken to be. */
function bySums(
  grid: Grid,
  band: Band,
  kind: FeatureKind,
  rectangles: readonly Rectangle[],
  who: Who,
): Feature | null {
  const { samples, significance, amplitude } = sumsOf(grid, band, rectangles);
  if (amplitude < LEAST_AMPLITUDE || significance < LEAST_SIGNIFICANCE) return null;
  return { kind, band, rectangles, who, counts: { ...noCounts(), usable: samples }, significance, amplitude };
}

/** Take a feature out of the marks and, if given, of a mask of its band. */
function take(grid: Grid, { rectangles, who, band }: Feature, mask: Uint8Array | null): void {
  for (const r of rectangles) {
    grid.clear(r, who.subset);
    if (mask === null) continue;
    for (let step = r.firstStep; step <= r.lastStep; step++) {
      const at = step * band.columns - band.first;
      mask.fill(0, at + r.low, at + r.high + 1);
    }
  }
}

function kindOf(region: Region, columns: number, steps: number): FeatureKind {
  const bounds = boundsOf(region, columns);
  const width = bounds.high - bounds.low + 1;
  const duration = bounds.lastStep - bounds.firstStep + 1;
  if (duration >= LINE_DURATION * steps && width <= Math.max(1, LINE_WIDTH * columns)) {
    return "persistent-line";
  }
  const drifts =
    width >= DRIFT_CHANNELS &&
    duration >= DRIFT_CHANNELS &&
    region.length < 0.7 * area(bounds) &&
    Math.abs(driftCorrelation(region, columns)) > DRIFT_CORRELATION;
  return drifts ? "drifting-line" : "burst";
}

/** Correlation of a region's middle channel with time. */
function driftCorrelation(region: Region, columns: number): number {
  const lines = linesOf(region, columns);
  const n = lines.length;
  const meanStep = lines.reduce((sum, { step }) => sum + step, 0) / n;
  const meanAt = lines.reduce((sum, { low, high }) => sum + (low + high) / 2, 0) / n;
  let [st, ss, tt] = [0, 0, 0];
  for (const { step, low, high } of lines) {
    const s = step - meanStep;
    const t = (low + high) / 2 - meanAt;
    st += s * t;
    ss += s * s;
    tt += t * t;
  }
  return st / Math.sqrt(ss * tt);
}

function runsOf(flags: Uint8Array): [low: number, high: number][] {
  const runs: [number, number][] = [];
  for (let c = 0; c < flags.length; c++) {
    if (flags[c] === 0) continue;
    const last = runs[runs.length - 1];
    if (last !== undefined && last[1] === c - 1) last[1] = c;
    else runs.push([c, c]);
  }
  return runs;
}
