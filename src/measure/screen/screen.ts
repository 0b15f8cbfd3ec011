/**
 * The screen: what one reading of the samples tells of where a second look is worth its time. By tile and slot (runs of
 * rows) sums over baselines of how far each channel's differences are above their row's level; by tile and baseline how
 * many are high, and the highest. All of it is whole numbers.
 */
import type { Dataset, Shape } from "../../dataset/dataset.ts";
import { Arena, kernelMemory } from "../../util/kernels/memory.ts";
import type { Accumulator } from "../accumulator.ts";
import { AUTOCORRELATION, OTHER, type PreparedBlock } from "../prepared.ts";
import type { StateReader } from "../state/reader.ts";
import type { StateRecord } from "../state/value.ts";
import { COUNT, COUNT_BRIGHT, COUNT_HIGH, LEVEL, OUTPUTS, PADDING, rowScreen } from "./row-screen.ts";
import { CHANNELS_OF_A_LEVEL, canScreen, type TileShape, tileShape } from "./shape.ts";
import {
  inOrder,
  joinTiles,
  newTile,
  restoreTile,
  type ScreenTile,
  tileState,
  withBaselines,
} from "./tile.ts";

/** Rows and samples that a kernel is given at once, about: they stay in the processor's cache. */
const MOST_ROWS = 64;
const SAMPLES_AT_ONCE = 1 << 14;

/** The screen of a survey: baselines numbered as in it. */
export interface Screened {
  readonly cut: TileShape;
  /** false where rows have too few channels to be screened */
  readonly isOn: boolean;
  /** null where a tile has no cross-correlations, or nothing was screened */
  readonly tiles: readonly (ScreenTile | null)[];
}

interface Room {
  readonly arena: Arena;
  readonly real: number;
  readonly imag: number;
  readonly bits: number;
  readonly scratch: number;
  readonly sums: number;
  readonly counts: number;
  readonly out: number;
}

export class Screen implements Accumulator {
  readonly cut: TileShape;
  readonly shape: Shape;
  /** by number of the tile; undefined where no row was met, all where a row has too few channels */
  readonly tiles: (ScreenTile | undefined)[] = [];
  private readonly isOn: boolean;
  private readonly rowsAtOnce: number;
  private room: Room | null = null;

  constructor(dataset: Dataset) {
    this.cut = tileShape(dataset);
    this.shape = dataset.shape;
    const { subbands, channels, polarizations } = dataset.shape;
    const rowSamples = subbands * channels * polarizations;
    this.rowsAtOnce = Math.max(1, Math.min(MOST_ROWS, Math.floor(SAMPLES_AT_ONCE / rowSamples)));
    this.isOn = canScreen(dataset) && (polarizations === 1 || polarizations === 2 || polarizations === 4);
  }

  add(prepared: PreparedBlock): void {
    if (!this.isOn || prepared.rows === 0) return;
    const { slotRows } = this.cut;
    const { firstRow } = prepared.block;
    let row = 0;
    while (row < prepared.rows) {
      if (prepared.baseline[row] === AUTOCORRELATION) {
        row += 1;
        continue;
      }
      const slot = Math.floor((firstRow + row) / slotRows);
      const end = Math.min(prepared.rows, row + this.rowsAtOnce, (slot + 1) * slotRows - firstRow);
      let last = row + 1;
      while (last < end && prepared.baseline[last] !== AUTOCORRELATION) last += 1;
      this.addRun(prepared, row, last, slot);
      row = last;
    }
  }

  /** Rows [first, last) of a block, all of one slot. */
  private addRun(prepared: PreparedBlock, first: number, last: number, slot: number): void {
    const { shape, cut } = this;
    const { subbands, channels, polarizations } = shape;
    const room = this.placed();
    const { rowSamples } = prepared;
    const { real, imag } = prepared.block;
    const { f32, i32, u32 } = kernelMemory.heap;
    const [from, to] = [first * rowSamples, last * rowSamples];
    const whole = rowScreen.screenRows(
      last - first,
      subbands,
      channels,
      polarizations,
      channels < CHANNELS_OF_A_LEVEL,
      inMemory(f32, real.subarray(from, to), room.real),
      inMemory(f32, imag.subarray(from, to), room.imag),
      inMemory(i32, prepared.bits.subarray(from, to), room.bits),
      room.scratch,
      room.sums,
      room.counts,
      room.out,
    );
    const number = Math.floor(slot / cut.slotsPerTile);
    let tile = this.tiles[number];
    if (tile === undefined) {
      tile = newTile(cut, shape);
      this.tiles[number] = tile;
    }
    const own = slot - number * cut.slotsPerTile;
    tile.whole[own]! += whole;
    const at = own * rowSamples;
    takeSums(u32, room.sums / 4, tile.sums, at, rowSamples);
    if (whole < last - first) takeSums(u32, room.counts / 4, tile.counts, at, rowSamples);
    this.addRows(tile, own, prepared, first, last, room.out / 4);
  }

  /** What each row by itself is like. */
  private addRows(
    tile: ScreenTile,
    slot: number,
    { baseline }: PreparedBlock,
    first: number,
    last: number,
    out: number,
  ): void {
    const products = this.shape.subbands * this.shape.polarizations;
    const { i32 } = kernelMemory.heap;
    for (let row = first; row < last; row++) {
      const b = baseline[row]!;
      if (b >= 0 && (b + 1) * products > tile.high.length) withBaselines(tile, b + 1, products);
      const from = out + (row - first) * OUTPUTS * products;
      for (let product = 0; product < products; product++) {
        const at = from + product;
        const count = i32[at + COUNT * products]!;
        if (count === 0) continue;
        tile.level[slot * products + product]! += i32[at + LEVEL * products]!;
        tile.rows[slot * products + product]! += 1;
        // Of the others only the sums over all.
        if (b < 0) continue;
        const own = b * products + product;
        tile.high[own]! += i32[at + COUNT_HIGH * products]!;
        tile.asked[own]! += count;
        tile.bright[own]! += i32[at + COUNT_BRIGHT * products]!;
      }
    }
  }

  private placed(): Room {
    if (this.room !== null) return this.room;
    const { subbands, channels, polarizations } = this.shape;
    const samples = subbands * channels * polarizations;
    const arena = new Arena();
    const place = (numbers: number) => {
      const address = arena.allocate(4 * numbers + PADDING);
      if (address === undefined) throw new RangeError("no room for the rows of a screen");
      return address;
    };
    const block = this.rowsAtOnce * samples;
    const room: Room = {
      arena,
      real: place(block),
      imag: place(block),
      bits: place(block),
      scratch: place(samples),
      sums: place(samples),
      counts: place(samples),
      out: place(this.rowsAtOnce * OUTPUTS * subbands * polarizations),
    };
    const { u32 } = kernelMemory.heap;
    u32.fill(0, room.sums / 4, room.sums / 4 + samples + PADDING / 4);
    u32.fill(0, room.counts / 4, room.counts / 4 + samples + PADDING / 4);
    this.room = room;
    return room;
  }

  /**
   * What was found, by baselines in another order; this is not to be used after.
   *
   * @param order number here of each baseline of the result
   */
  finish(order: Int32Array): Screened {
    this.release();
    const products = this.shape.subbands * this.shape.polarizations;
    const tiles = Array.from({ length: this.cut.tiles }, (_, number) => {
      const tile = this.tiles[number];
      return tile === undefined ? null : inOrder(tile, order, products);
    });
    return { cut: this.cut, isOn: this.isOn, tiles };
  }

  thin(baselines: Int32Array): void {
    const products = this.shape.subbands * this.shape.polarizations;
    const kept = Int32Array.from(baselines.keys()).filter((before) => baselines[before] !== OTHER);
    for (const [number, tile] of this.tiles.entries()) {
      if (tile !== undefined) this.tiles[number] = inOrder(tile, kept, products);
    }
  }

  merge(other: this, baselines: Int32Array): void {
    const products = this.shape.subbands * this.shape.polarizations;
    for (const [number, tile] of other.tiles.entries()) {
      if (tile === undefined) continue;
      const own = this.tiles[number] ?? newTile(this.cut, this.shape);
      joinTiles(own, tile, baselines, products);
      this.tiles[number] = own;
    }
    other.release();
  }

  state(): StateRecord {
    this.release();
    return { tiles: Array.from(this.tiles, (tile) => (tile === undefined ? null : tileState(tile))) };
  }

  restore(from: StateReader, baselines: number): void {
    for (const [number, tile] of from.child("tiles").items(this.cut.tiles).entries()) {
      if (tile !== null) this.tiles[number] = restoreTile(tile, this.cut, this.shape, baselines);
    }
  }

  /** The room to work in, which no collector takes. */
  release(): void {
    this.room?.arena.release();
    this.room = null;
  }
}

/** Address of numbers in the kernels' memory, where they are copied to `room` unless they lie in it. */
function inMemory<A extends Float32Array | Int32Array>(
  heap: { set(numbers: A, at: number): void },
  numbers: A,
  room: number,
): number {
  const address = kernelMemory.addressOf(numbers);
  if (address !== undefined) return address;
  heap.set(numbers, room / 4);
  return room;
}

/** Add the sums that a kernel left to those of a slot, and begin again. */
function takeSums(from: Uint32Array, first: number, to: Uint32Array, at: number, count: number): void {
  for (let i = 0; i < count; i++) to[at + i]! += from[first + i]!;
  from.fill(0, first, first + count);
}
