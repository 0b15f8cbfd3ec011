/** What the screen keeps of one tile. */
import type { Shape } from "../../dataset/dataset.ts";
import type { StateReader } from "../state/reader.ts";
import type { StateRecord } from "../state/value.ts";
import type { TileShape } from "./shape.ts";

export interface ScreenTile {
  /** (slots x samples of a row) over rows: steps above 3 octaves below the row's level */
  readonly sums: Uint32Array;
  /** (slots x samples of a row) differences in them of rows that are not whole, */
  readonly counts: Uint32Array;
  /** (slots) and rows that are */
  readonly whole: Uint32Array;
  /** (slots x subbands x polarizations) sum over rows of their level, steps; and rows in it */
  readonly level: Float64Array;
  readonly rows: Uint32Array;
  /** (baselines x subbands x polarizations) differences that are high, those that are bright, and all */
  high: Uint32Array;
  bright: Uint32Array;
  asked: Uint32Array;
}

export function newTile({ slotsPerTile }: TileShape, shape: Shape): ScreenTile {
  const products = shape.subbands * shape.polarizations;
  const samples = products * shape.channels;
  return {
    sums: new Uint32Array(slotsPerTile * samples),
    counts: new Uint32Array(slotsPerTile * samples),
    whole: new Uint32Array(slotsPerTile),
    level: new Float64Array(slotsPerTile * products),
    rows: new Uint32Array(slotsPerTile * products),
    high: new Uint32Array(0),
    asked: new Uint32Array(0),
    bright: new Uint32Array(0),
  };
}

/** Make room for so many baselines. */
export function withBaselines(tile: ScreenTile, baselines: number, products: number): void {
  const size = Math.max(2 * tile.high.length, baselines * products);
  const [high, asked, bright] = [new Uint32Array(size), new Uint32Array(size), new Uint32Array(size)];
  high.set(tile.high);
  asked.set(tile.asked);
  bright.set(tile.bright);
  tile.high = high;
  tile.asked = asked;
  tile.bright = bright;
}

/** @param baselines for each baseline number of `from`, that of `to` */
export function joinTiles(to: ScreenTile, from: ScreenTile, baselines: Int32Array, products: number): void {
  for (const name of ["sums", "counts", "whole", "level", "rows"] as const) {
    const [own, others] = [to[name], from[name]];
    for (let i = 0; i < own.length; i++) own[i]! += others[i]!;
  }
  for (let b = 0; b < baselines.length && (b + 1) * products <= from.high.length; b++) {
    const own = baselines[b]!;
    if ((own + 1) * products > to.high.length) withBaselines(to, own + 1, products);
    for (let p = 0; p < products; p++) {
      const [at, other] = [own * products + p, b * products + p];
      to.high[at]! += from.high[other]!;
      to.asked[at]! += from.asked[other]!;
      to.bright[at]! += from.bright[other]!;
    }
  }
}

/** The same tile with its baselines in another order. @param order number of each in `tile` */
export function inOrder(tile: ScreenTile, order: Int32Array, products: number): ScreenTile {
  const size = order.length * products;
  const [high, asked, bright] = [new Uint32Array(size), new Uint32Array(size), new Uint32Array(size)];
  for (const [place, number] of order.entries()) {
    for (let p = 0; p < products; p++) {
      high[place * products + p] = tile.high[number * products + p] ?? 0;
      asked[place * products + p] = tile.asked[number * products + p] ?? 0;
      bright[place * products + p] = tile.bright[number * products + p] ?? 0;
    }
  }
  return { ...tile, high, asked, bright };
}

export function tileState(tile: ScreenTile): StateRecord {
  return { ...tile };
}

/** @throws InputError where it is no state of a tile */
export function restoreTile(from: StateReader, cut: TileShape, shape: Shape, baselines: number): ScreenTile {
  const like = newTile(cut, shape);
  const high = from.array(Uint32Array, "high");
  const products = shape.subbands * shape.polarizations;
  // Room is made by doubling: no more than that can be there.
  if (high.length > 2 * baselines * products) throw from.error(`${high.length} numbers are too many`, "high");
  return {
    sums: from.array(Uint32Array, "sums", like.sums.length),
    counts: from.array(Uint32Array, "counts", like.counts.length),
    whole: from.array(Uint32Array, "whole", like.whole.length),
    level: from.counts(Float64Array, "level", like.level.length),
    rows: from.array(Uint32Array, "rows", like.rows.length),
    high,
    asked: from.array(Uint32Array, "asked", high.length),
    bright: from.array(Uint32Array, "bright", high.length),
  };
}
