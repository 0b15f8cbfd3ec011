/** Where the screen's sums over baselines stand out: tiles, and channels in which something is there all the time. */
import type { Shape } from "../../dataset/dataset.ts";
import type { Screened } from "../../measure/screen/screen.ts";
import type { Survey } from "../../measure/survey-result.ts";
import { medianInPlace } from "../statistics/order.ts";
import { type Band, bandsOf } from "./bands.ts";

/** Standard deviation of the steps of noise: of 32 log2 of an exponential variable, cut 3 octaves below its log mean. */
const SPREAD = 50.9;
/**
 * Sigmas of a run of any length: less than what the second pass tells from its background, and seldom enough in noise.
 * Differences of neighbouring channels share samples, so that runs along frequency scatter more.
 */
const SIGNIFICANT = 6.5;
const LONGEST_TIME = 64;
const LONGEST_FREQUENCY = 16;
/** A channel's typical excess over its neighbours, in its errors and in steps (4 % of power), to be always there. */
const PERSISTENT_ERRORS = 6;
const PERSISTENT_STEPS = 2;
const NEIGHBOURS = 6;
/** Share of the tiles in which it has to be more than half of what is typical. */
const LASTING = 0.8;
/** Channels between two that stand out may be inside of what has its edges there. */
const INSIDE = 8;
/** Level of a slot over the usual, in its scatter and in steps (1.35 times the power), to be loud. */
const LOUD_SCATTER = 6;
const LOUD_STEPS = 14;

export interface Suspects {
  /** (tiles) 1 where sums over baselines stand out for a while */
  readonly tiles: Uint8Array;
  /** (channels of all sub-bands) 1 where they do all the time */
  readonly persistent: Uint8Array;
}

export function suspectsOf({ dataset }: Survey, screen: Screened): Suspects {
  const { subbands, channels, polarizations } = dataset.shape;
  const tiles = new Uint8Array(screen.cut.tiles);
  const persistent = new Uint8Array(subbands * channels);
  const products: (number | null)[] = [...Array(polarizations).keys()];
  if (polarizations > 1) products.push(null);
  for (const band of bandsOf(dataset.shape)) {
    for (const product of products) {
      const plane = planeOf(dataset.shape, screen, band, product);
      for (const tile of loudTiles(dataset.shape, screen, band, product, levelRows(plane))) tiles[tile] = 1;
      markPersistent(plane, persistent, band.first, screen.cut.slotsPerTile);
      standardise(plane);
      for (const slot of slotsOfRuns(plane)) tiles[Math.floor(slot / screen.cut.slotsPerTile)] = 1;
    }
  }
  return { tiles, persistent };
}

interface SlotPlane {
  readonly slots: number;
  readonly columns: number;
  /** (slots x columns) mean steps over baselines, then scores; and differences in them */
  readonly scores: Float32Array;
  readonly counts: Float64Array;
  /** 2 where there are none */
  readonly marks: Uint8Array;
  /** (columns) typical mean, NaN unknown */
  readonly usual: Float64Array;
}

function planeOf(shape: Shape, { tiles, cut }: Screened, band: Band, product: number | null): SlotPlane {
  const { subbands, channels, polarizations } = shape;
  const rowSamples = subbands * channels * polarizations;
  const { slotsPerTile } = cut;
  const { columns } = band;
  const slots = tiles.length * slotsPerTile;
  const scores = new Float32Array(slots * columns);
  const counts = new Float64Array(slots * columns);
  const marks = new Uint8Array(slots * columns).fill(2);
  const [from, to] = product === null ? [0, polarizations] : [product, product + 1];
  for (const [number, tile] of tiles.entries()) {
    if (tile === null) continue;
    for (let slot = 0; slot < slotsPerTile; slot++) {
      for (let c = 0; c < columns; c++) {
        const place = (band.first + c) % channels;
        // The first and last channel of a sub-band have a neighbour on one side only.
        if (place === 0 || place === channels - 1) continue;
        let sum = 0;
        let count = 0;
        for (let p = from; p < to; p++) {
          const at = slot * rowSamples + (band.first + c) * polarizations + p;
          sum += tile.sums[at]!;
          count += tile.counts[at]! + tile.whole[slot]!;
        }
        if (count === 0) continue;
        const i = (number * slotsPerTile + slot) * columns + c;
        scores[i] = sum / count;
        counts[i] = count;
        marks[i] = 0;
      }
    }
  }
  return { slots, columns, scores, counts, marks, usual: new Float64Array(columns).fill(Number.NaN) };
}

/** Take out what the channels of a slot have in common. @returns (slots) that; NaN where there is nothing */
function levelRows({ slots, columns, scores, marks }: SlotPlane): Float64Array {
  const work = new Float64Array(columns);
  return Float64Array.from({ length: slots }, (_, slot) => {
    const from = slot * columns;
    let count = 0;
    for (let i = from; i < from + columns; i++) if (marks[i] === 0) work[count++] = scores[i]!;
    const middle = medianInPlace(work, count);
    for (let i = from; i < from + columns; i++) if (marks[i] === 0) scores[i]! -= middle;
    return middle;
  });
}

/** Fill `usual`, and mark channels whose typical mean stands out of their neighbours'. */
function markPersistent(plane: SlotPlane, persistent: Uint8Array, first: number, slotsPerTile: number): void {
  const { slots, columns, scores, counts, marks, usual } = plane;
  const work = new Float64Array(Math.max(slots, columns));
  const errors = new Float64Array(columns);
  for (let c = 0; c < columns; c++) {
    let known = 0;
    let differences = 0;
    for (let i = c; i < slots * columns; i += columns) {
      if (marks[i] !== 0) continue;
      work[known++] = scores[i]!;
      differences += counts[i]!;
    }
    // The median is less certain than the mean by 1.25.
    errors[c] = (1.25 * SPREAD) / Math.sqrt(differences);
    usual[c] = medianInPlace(work, known);
  }
  const usuals = usual.slice();
  let before = -1;
  for (let c = 0; c < columns; c++) {
    let known = 0;
    for (let k = Math.max(0, c - NEIGHBOURS); k <= Math.min(columns - 1, c + NEIGHBOURS); k++) {
      if (!Number.isNaN(usual[k]!)) work[known++] = usual[k]!;
    }
    const around = medianInPlace(work, known);
    const excess = usual[c]! - around;
    if (!(excess > Math.max(PERSISTENT_STEPS, PERSISTENT_ERRORS * errors[c]!))) continue;
    if (!lasts(plane, c, slotsPerTile, around + excess / 2)) {
      // There for long but not always: where it is, it stands out.
      usuals[c] = around;
      continue;
    }
    for (let i = c; i < slots * columns; i += columns) marks[i] = 2;
    const from = before >= 0 && c - before <= INSIDE ? before : c;
    persistent.fill(1, first + from, first + c + 1);
    before = c;
  }
  usual.set(usuals);
}

/** Whether the mean of a channel exceeds a limit in nearly all tiles. */
function lasts(
  { slots, columns, scores, marks }: SlotPlane,
  column: number,
  perTile: number,
  limit: number,
): boolean {
  let seen = 0;
  let high = 0;
  for (let first = 0; first < slots; first += perTile) {
    let sum = 0;
    let count = 0;
    for (let slot = first; slot < first + perTile; slot++) {
      if (marks[slot * columns + column] !== 0) continue;
      sum += scores[slot * columns + column]!;
      count += 1;
    }
    if (count === 0) continue;
    seen += 1;
    if (sum > limit * count) high += 1;
  }
  return high >= LASTING * seen;
}

/** Over the column's usual mean, in its error. */
function standardise({ slots, columns, scores, counts, marks, usual }: SlotPlane): void {
  for (let from = 0; from < slots * columns; from += columns) {
    for (let c = 0; c < columns; c++) {
      const i = from + c;
      if (marks[i] === 0) scores[i] = ((scores[i]! - usual[c]!) * Math.sqrt(counts[i]!)) / SPREAD;
    }
  }
}

/** Slots in which runs in time or frequency are significant. Uses up the scores: what is found counts no more in longer runs. */
function slotsOfRuns({ slots, columns, scores, marks }: SlotPlane): Set<number> {
  const found = new Set<number>();
  for (let i = 0; i < scores.length; i++) if (marks[i] !== 0) scores[i] = 0;
  const fresh = new Uint8Array(scores.length);
  for (let length = 1; length <= LONGEST_TIME; length *= 2) {
    const limit = SIGNIFICANT * Math.sqrt(length);
    let any = false;
    for (let c = 0; c < columns; c++) any = markRuns(scores, c, columns, slots, length, limit, fresh) || any;
    for (let slot = 0; length <= LONGEST_FREQUENCY && slot < slots; slot++) {
      any = markRuns(scores, slot * columns, 1, columns, length, limit, fresh) || any;
    }
    for (let i = 0; any && i < fresh.length; i++) {
      if (fresh[i] === 0) continue;
      found.add(Math.floor(i / columns));
      scores[i] = 0;
      fresh[i] = 0;
    }
  }
  return found;
}

/** Mark runs along a line whose sum exceeds a limit. @returns whether there are any */
function markRuns(
  scores: Float32Array,
  start: number,
  stride: number,
  count: number,
  length: number,
  limit: number,
  fresh: Uint8Array,
): boolean {
  let sum = 0;
  let any = false;
  for (let k = 0; k < count; k++) {
    sum += scores[start + k * stride]!;
    if (k >= length) sum -= scores[start + (k - length) * stride]!;
    if (k + 1 < length || !(sum > limit)) continue;
    any = true;
    for (let j = k - length + 1; j <= k; j++) fresh[start + j * stride] = 1;
  }
  return any;
}

/**
 * Tiles in or beside which the noise of a band is raised in some slot.
 *
 * @param common (slots) what the channels have in common over the levels of their rows: narrow features raise those
 */
function loudTiles(
  { polarizations, subbands }: Shape,
  { tiles, cut }: Screened,
  { subband }: Band,
  product: number | null,
  common: Float64Array,
): number[] {
  if (subband === null || product === null) return [];
  const { slotsPerTile } = cut;
  const products = subbands * polarizations;
  const levels = common.map((middle, slot) => {
    const tile = tiles[Math.floor(slot / slotsPerTile)]!;
    const at = (slot % slotsPerTile) * products + subband * polarizations + product;
    return tile === null ? Number.NaN : middle + tile.level[at]! / tile.rows[at]!;
  });
  const known = levels.filter((level) => !Number.isNaN(level));
  const usual = medianInPlace(known.slice());
  const scatter = 1.4826 * medianInPlace(known.map((level) => Math.abs(level - usual)));
  const limit = usual + Math.max(LOUD_STEPS, LOUD_SCATTER * scatter);
  const found = [...levels.keys()].filter((slot) => levels[slot]! > limit);
  // What is usual of a baseline is to be seen besides.
  const wider = found
    .map((slot) => Math.floor(slot / slotsPerTile))
    .flatMap((tile) => [tile - 1, tile, tile + 1]);
  return [...new Set(wider)].filter((tile) => tile >= 0 && tile < tiles.length);
}
