/**
 * Which baselines and products a feature is on: the likeliest of a few simple answers, by how many of its samples are
 * elevated on each (in noise, ELEVATED_SHARE of them are).
 */
import { lengthOrder, projectedLengths } from "../pass/lengths.ts";
import { ELEVATED_SHARE } from "../pass/marks.ts";
import { ALL, addCounts, type Counts, type Grid, noCounts, type Rectangle, type Subset } from "./grid.ts";

export interface Who {
  readonly subset: Subset;
  /** all baselines, those up to a length, those of one antenna, or a list */
  readonly kind: "all" | "short" | "antenna" | "listed";
  readonly antenna: number | null;
  readonly baselines: number;
  /** shortest projected length that is not hit, seconds of light travel; NaN unless "short" */
  readonly shorterThan: number;
}

/** Gain in log likelihood that a baseline more in a list must bring. */
const PRICE_OF_BASELINE = 4;
/** Most baselines that are named one by one: these, or this share. */
const MOST_LISTED = 3;
const LISTED_SHARE = 1 / 12;
/** No list where the other baselines together gain this too. */
const GAIN_OF_REST = 10;
const ROUNDS = 2;

/** Log likelihood of counts with a share of the samples elevated, over that in noise. */
export function likelihood({ usable, elevated, noise }: Counts, share: number): number {
  const q = Math.min(0.98, Math.max(share, 1.5 * ELEVATED_SHARE));
  return elevated * Math.log(q) + (usable - elevated) * Math.log(1 - q) - noise;
}

/** Who is hit in some rectangles. */
export function whoIsHit(grid: Grid, rectangles: readonly Rectangle[]): Who {
  const order = lengthOrder(grid.survey);
  let polarizations: Uint8Array | null = null;
  let who: Who = everyone(grid);
  for (let round = 0; round < ROUNDS; round++) {
    who = baselinesHit(grid, rectangles, polarizations, order);
    const next = productsHit(grid, rectangles, who.subset.baselines);
    who = { ...who, subset: { ...who.subset, polarizations: next } };
    if (String(next) === String(polarizations)) break;
    polarizations = next;
  }
  return who;
}

export function everyone(grid: Grid): Who {
  return {
    subset: ALL,
    kind: "all",
    antenna: null,
    baselines: grid.survey.baselines.length,
    shorterThan: Number.NaN,
  };
}

function baselinesHit(
  grid: Grid,
  rectangles: readonly Rectangle[],
  polarizations: Uint8Array | null,
  order: readonly number[],
): Who {
  const { baselines } = grid.survey;
  const counts = baselines.map(noCounts);
  for (const rectangle of rectangles) {
    grid.count(rectangle, { baselines: null, polarizations }, counts, (baseline) => baseline);
  }
  const withData = order.filter((b) => counts[b]!.usable > 0);
  if (withData.length < 2) return everyone(grid);
  const gain = (members: readonly number[]) => gainOf(sumOf(counts, members));
  let best: { who: Who; value: number } = { who: everyone(grid), value: gain(withData) };
  const consider = (members: readonly number[], value: number, rest: Partial<Who>) => {
    if (value <= best.value) return;
    const mask = new Uint8Array(baselines.length);
    for (const b of members) mask[b] = 1;
    const who: Who = {
      subset: { baselines: mask, polarizations },
      kind: "listed",
      antenna: null,
      baselines: members.length,
      shorterThan: Number.NaN,
      ...rest,
    };
    best = { who, value };
  };
  const priceOfChoice = 3 + Math.log(baselines.length);
  const lengths = projectedLengths(grid.survey);
  eachPrefix(counts, withData, withData.length - 1, (n, value) => {
    const shorterThan = lengths[withData[n]!]!;
    if (Number.isNaN(shorterThan)) return;
    if (value - priceOfChoice <= best.value) return;
    consider(withData.slice(0, n), value - priceOfChoice, { kind: "short", shorterThan });
  });
  for (const antenna of grid.survey.antennasWithData) {
    const members = withData.filter(
      (b) => baselines[b]!.antenna1 === antenna || baselines[b]!.antenna2 === antenna,
    );
    if (members.length > 1) consider(members, gain(members) - priceOfChoice, { kind: "antenna", antenna });
  }
  const byShare = [...withData].sort(
    (a, b) => counts[b]!.elevated / counts[b]!.usable - counts[a]!.elevated / counts[a]!.usable || a - b,
  );
  // What many baselines see, in no order of length, all see: the backgrounds of some took it in.
  eachPrefix(
    counts,
    byShare,
    Math.min(byShare.length - 1, Math.max(MOST_LISTED, Math.floor(LISTED_SHARE * byShare.length))),
    (n, value) => {
      const worth = value - PRICE_OF_BASELINE * n;
      if (worth <= best.value || gain(byShare.slice(n)) > GAIN_OF_REST) return;
      consider(
        byShare.slice(0, n).sort((a, b) => a - b),
        worth,
        {},
      );
    },
  );
  return best.who;
}

/** The products that are hit; null: all. */
function productsHit(
  grid: Grid,
  rectangles: readonly Rectangle[],
  baselines: Uint8Array | null,
): Uint8Array | null {
  const { polarizations } = grid;
  if (polarizations === 1) return null;
  const counts = Array.from({ length: polarizations }, noCounts);
  for (const rectangle of rectangles) {
    grid.count(rectangle, { baselines, polarizations: null }, counts, (_, __, ___, p) => p);
  }
  const whole = Uint8Array.from(counts, () => 1);
  let best = gainOf(sumOf(counts, [...whole.keys()]));
  let chosen: Uint8Array | null = null;
  const share = (p: number) => counts[p]!.elevated / Math.max(1, counts[p]!.usable);
  const order = [...whole.keys()].sort((a, b) => share(b) - share(a) || a - b);
  for (let n = 1; n < polarizations; n++) {
    const members = order.slice(0, n);
    const value = gainOf(sumOf(counts, members)) - PRICE_OF_BASELINE;
    if (value <= best) continue;
    best = value;
    chosen = new Uint8Array(polarizations);
    for (const p of members) chosen[p] = 1;
  }
  return chosen;
}

function sumOf(counts: readonly Counts[], members: readonly number[]): Counts {
  const sum = noCounts();
  for (const i of members) addCounts(sum, counts[i]!);
  return sum;
}

function gainOf(counts: Counts): number {
  return counts.usable === 0 ? 0 : likelihood(counts, counts.elevated / counts.usable);
}

/** The gain of the first n of an order, n from 1 to `most`. */
function eachPrefix(
  counts: readonly Counts[],
  order: readonly number[],
  most: number,
  visit: (n: number, gain: number) => void,
): void {
  const sum = noCounts();
  for (let n = 1; n <= most; n++) {
    addCounts(sum, counts[order[n - 1]!]!);
    visit(n, gainOf(sum));
  }
}
