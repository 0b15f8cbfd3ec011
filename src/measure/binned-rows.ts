/**
 * The track cells of a dataset with too many rows to keep: one a baseline, field, setup, sub-array and time bin. Bins are
 * as narrow as the memory allows, in steps of two: the step is the first at which all cells fit, and since how many there
 * are does not depend on the order of the rows, neither does the step. Sums over rows are exact, so nor do they.
 */

import type { Shape } from "../dataset/dataset.ts";
import { SECONDS_PER_DAY } from "../util/constants.ts";
import { InputError } from "../util/errors.ts";
import { ExactSums } from "./exact-sums.ts";
import {
  BAD,
  FLAGGED,
  KINDS,
  type PreparedBlock,
  SLOPE_IMAG,
  SLOPE_REAL,
  SUM_AMPLITUDE,
  SUM_IMAG,
  SUM_REAL,
  SUM_WEIGHT,
  SUMS,
  USABLE,
  ZERO,
} from "./prepared.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";
import {
  cellColumns,
  firstCells,
  gather,
  orderOf,
  productColumns,
  type TracksWithoutScans,
} from "./track-columns.ts";
import type { TrackKeeper } from "./track-keeper.ts";

/** Narrowest bin, seconds. */
const NARROWEST = 0.25;
/** A bin that holds all there is, seconds: ten years. */
const LONGEST = 3e8;
/** Sums a cell: time, u, v, w, integration; numbers of rows that gave each are in `given`. */
const CELL_SUMS = 5;
/** Sums a product: the first of `prepared`'s, up to the slopes. */
const PRODUCT_SUMS = 6;
/** Counts a product. */
const PRODUCT_COUNTS = 4;
const MAP_BYTES = 64;
/** What the kernels' memory has room for beside the rest, also while it is moved to a larger place. */
const MOST_BYTES = 512e6;

/** Cells of one baseline, field, setup and sub-array, by number of their bin. */
interface Stream {
  baseline: number;
  readonly field: number;
  readonly setup: number;
  readonly subarray: number;
  cells: Map<number, number>;
}

type Five = [number, number, number, number, number];

/** The sums of some cells. */
class CellSums {
  readonly width: number;
  cells = 0;
  private room: number;
  readonly own: ExactSums;
  readonly products: ExactSums;
  /** (cells x CELL_SUMS) rows that gave a number */
  given: Float64Array;
  /** (cells x products x PRODUCT_COUNTS) */
  counts: Float64Array;

  /** @param room for so many cells at once: only those in use take memory */
  constructor(width: number, room: number) {
    this.width = width;
    this.room = room;
    this.own = new ExactSums(this.room * CELL_SUMS);
    this.products = new ExactSums(this.room * width * PRODUCT_SUMS);
    this.given = new Float64Array(this.room * CELL_SUMS);
    this.counts = new Float64Array(this.room * width * PRODUCT_COUNTS);
  }

  release(): void {
    this.own.release();
    this.products.release();
  }

  newCell(): number {
    if (this.cells === this.room) this.grow(2 * this.room);
    return this.cells++;
  }

  grow(room: number): void {
    this.room = room;
    this.own.grow(this.room * CELL_SUMS);
    this.products.grow(this.room * this.width * PRODUCT_SUMS);
    const given = new Float64Array(this.room * CELL_SUMS);
    given.set(this.given);
    this.given = given;
    const counts = new Float64Array(this.room * this.width * PRODUCT_COUNTS);
    counts.set(this.counts);
    this.counts = counts;
  }

  addNumber(cell: number, k: number, value: number): void {
    if (!Number.isFinite(value)) return;
    this.own.add(cell * CELL_SUMS + k, value);
    this.given[cell * CELL_SUMS + k]! += 1;
  }

  /** Add a cell of another set. */
  merge(cell: number, other: CellSums, theirs: number): void {
    for (let k = 0; k < CELL_SUMS; k++) {
      this.own.merge(cell * CELL_SUMS + k, other.own, theirs * CELL_SUMS + k);
      this.given[cell * CELL_SUMS + k]! += other.given[theirs * CELL_SUMS + k]!;
    }
    const sums = this.width * PRODUCT_SUMS;
    for (let k = 0; k < sums; k++) this.products.merge(cell * sums + k, other.products, theirs * sums + k);
    const counts = this.width * PRODUCT_COUNTS;
    for (let k = 0; k < counts; k++) this.counts[cell * counts + k]! += other.counts[theirs * counts + k]!;
  }

  state(): StateRecord {
    const { cells, width, own, products, given, counts } = this;
    return {
      cells,
      own: own.state(cells * CELL_SUMS),
      products: products.state(cells * width * PRODUCT_SUMS),
      given: given.subarray(0, cells * CELL_SUMS),
      counts: counts.subarray(0, cells * width * PRODUCT_COUNTS),
    };
  }

  restore(from: StateReader): void {
    const { width } = this;
    const cells = from.integer("cells");
    this.own.restore(from.child("own"), cells * CELL_SUMS);
    this.products.restore(from.child("products"), cells * width * PRODUCT_SUMS);
    this.given = from.counts(Float64Array, "given", cells * CELL_SUMS);
    this.counts = from.counts(Float64Array, "counts", cells * width * PRODUCT_COUNTS);
    this.cells = cells;
    this.room = Math.max(1, cells);
  }

  mean(cell: number, k: number): number {
    return this.own.value(cell * CELL_SUMS + k) / this.given[cell * CELL_SUMS + k]!;
  }
}

export class BinnedRows implements TrackKeeper {
  private readonly width: number;
  private readonly most: number;
  private readonly streams = new Map<string, Stream>();
  private last: Stream | undefined;
  private seconds = NARROWEST;
  private sums: CellSums;

  /** @param bytes  that the cells may take */
  constructor(shape: Shape, bytes: number) {
    this.width = shape.subbands * shape.polarizations;
    const cellBytes =
      MAP_BYTES +
      CELL_SUMS * (ExactSums.BYTES + 8) +
      this.width * (PRODUCT_SUMS * ExactSums.BYTES + PRODUCT_COUNTS * 8);
    this.most = Math.max(1024, Math.floor(Math.min(bytes, MOST_BYTES) / cellBytes));
    this.sums = new CellSums(this.width, this.most + 1);
  }

  add(prepared: PreparedBlock): void {
    const { block, baseline } = prepared;
    for (let row = 0; row < prepared.rows; row++) {
      const time = block.time[row]!;
      if (baseline[row]! < 0 || !Number.isFinite(time)) continue;
      const stream = this.streamOf(
        baseline[row]!,
        block.field[row]!,
        block.setup[row]!,
        block.subarray[row]!,
      );
      this.addRow(prepared, row, this.cellOf(stream, time));
      while (this.sums.cells > this.most) this.widen();
    }
  }

  private addRow(prepared: PreparedBlock, row: number, cell: number): void {
    const { block } = prepared;
    const { sums, width } = this;
    const sign = prepared.sign[row]!;
    sums.addNumber(cell, 0, block.time[row]!);
    sums.addNumber(cell, 1, sign * block.u[row]!);
    sums.addNumber(cell, 2, sign * block.v[row]!);
    sums.addNumber(cell, 3, sign * block.w[row]!);
    sums.addNumber(cell, 4, block.integration[row]!);
    const values = prepared.at.sums + 8 * SUMS * row * width;
    sums.products.addGroups(cell * width * PRODUCT_SUMS, values, SUMS, width, PRODUCT_SUMS);
    for (let product = 0; product < width; product++) {
      const from = row * width + product;
      const to = cell * width + product;
      for (let k = 0; k < PRODUCT_COUNTS; k++) {
        sums.counts[to * PRODUCT_COUNTS + k]! += prepared.counts[from * KINDS + k]!;
      }
    }
  }

  private streamOf(baseline: number, field: number, setup: number, subarray: number): Stream {
    const { last } = this;
    if (
      last?.baseline === baseline &&
      last.field === field &&
      last.setup === setup &&
      last.subarray === subarray
    ) {
      return last;
    }
    const key = `${baseline} ${field} ${setup} ${subarray}`;
    let stream = this.streams.get(key);
    if (stream === undefined) {
      stream = { baseline, field, setup, subarray, cells: new Map() };
      this.streams.set(key, stream);
    }
    this.last = stream;
    return stream;
  }

  private cellOf(stream: Stream, time: number): number {
    return this.cellAt(stream, Math.floor((time * SECONDS_PER_DAY) / this.seconds));
  }

  private cellAt(stream: Stream, bin: number): number {
    let cell = stream.cells.get(bin);
    if (cell === undefined) {
      cell = this.sums.newCell();
      stream.cells.set(bin, cell);
    }
    return cell;
  }

  /** Bins twice as wide. A bin holds two whole ones of those before. */
  private widen(): void {
    this.seconds *= 2;
    const before = this.sums;
    this.sums = new CellSums(this.width, this.most + 1);
    for (const stream of this.streams.values()) {
      const cells = stream.cells;
      stream.cells = new Map();
      for (const [bin, cell] of cells) {
        this.sums.merge(this.cellAt(stream, Math.floor(bin / 2)), before, cell);
      }
    }
    before.release();
    // Streams without end cannot be joined: only time can.
    if (this.seconds > LONGEST) {
      throw new InputError(
        `the rows name ${this.streams.size} baselines of fields: expected at most ${this.most} in this memory`,
        {},
        "The antenna or field numbers are damaged, or --memory is too small",
      );
    }
  }

  merge(other: this, baselines: Int32Array): void {
    while (this.seconds < other.seconds) this.widen();
    for (const theirs of other.streams.values()) {
      const ours = this.streamOf(baselines[theirs.baseline]!, theirs.field, theirs.setup, theirs.subarray);
      for (const [bin, cell] of theirs.cells) {
        const steps = this.seconds / other.seconds;
        this.sums.merge(this.cellAt(ours, Math.floor(bin / steps)), other.sums, cell);
        // Cells that are too many for a part of the numbers are so for all of them.
        while (this.sums.cells > this.most) this.widen();
      }
    }
  }

  state(): StateRecord {
    const streams = [...this.streams.values()];
    return {
      seconds: this.seconds,
      /** (streams x 5) what they are of, and how many cells they have */
      streams: Float64Array.from(
        streams.flatMap(({ baseline, field, setup, subarray, cells }) => [
          baseline,
          field,
          setup,
          subarray,
          cells.size,
        ]),
      ),
      bins: Float64Array.from(streams.flatMap(({ cells }) => [...cells.keys()])),
      cells: Int32Array.from(streams.flatMap(({ cells }) => [...cells.values()])),
      sums: this.sums.state(),
    };
  }

  restore(from: StateReader, baselines: number, setups: number): void {
    this.seconds = from.number("seconds");
    if (!(Number.isInteger(Math.log2(this.seconds / NARROWEST)) && this.seconds <= 2 * LONGEST)) {
      throw from.error(`${this.seconds} s is no width of a bin`, "seconds");
    }
    this.sums.restore(from.child("sums"));
    this.sums.grow(Math.max(this.most + 1, this.sums.cells));
    const cells = from.indices(Int32Array, "cells", this.sums.cells, 0, this.sums.cells);
    if (new Set(cells).size !== cells.length) throw from.error("a cell stands in two bins", "cells");
    const bins = from.finite(Float64Array, "bins", cells.length);
    const streams = from.finite(Float64Array, "streams");
    let held = 0;
    for (let i = 0, at = 0; i + 5 <= streams.length; i += 5) {
      const [baseline, field, setup, subarray, count] = streams.subarray(i, i + 5) as unknown as Five;
      if (!(baseline >= 0 && baseline < baselines && setup >= 0 && setup < setups)) {
        throw from.error(
          `there is no baseline ${baseline} of ${baselines} in setup ${setup} of ${setups}`,
          "streams",
        );
      }
      const stream = this.streamOf(baseline, field, setup, subarray);
      for (const end = Math.min(at + count, bins.length); at < end; at++)
        stream.cells.set(bins[at]!, cells[at]!);
      held += stream.cells.size;
    }
    if (held !== cells.length) throw from.error(`${held} bins hold ${cells.length} cells`, "streams");
  }

  /** Give the kernels' memory back. Nothing can be asked or added after. */
  release(): void {
    this.sums.release();
  }

  tracks(places: Int32Array): TracksWithoutScans {
    const { sums, width } = this;
    const cells = cellColumns(sums.cells);
    const products = productColumns(sums.cells * width);
    for (const { baseline, field, setup, subarray, cells: ofStream } of this.streams.values()) {
      for (const cell of ofStream.values()) {
        cells.baseline[cell] = baseline;
        cells.time[cell] = sums.mean(cell, 0);
        cells.u[cell] = sums.mean(cell, 1);
        cells.v[cell] = sums.mean(cell, 2);
        cells.w[cell] = sums.mean(cell, 3);
        cells.integration[cell] = sums.mean(cell, 4);
        cells.field[cell] = field;
        cells.setup[cell] = setup;
        cells.subarray[cell] = subarray;
      }
    }
    for (let i = 0; i < sums.cells * width; i++) this.fillProduct(products, i);
    // No two cells are alike in baseline, field, setup, sub-array and time.
    const order = orderOf(sums.cells, cells, new Uint8Array(sums.cells), places);
    const columns = gather(cells, order, 1);
    for (let cell = 0; cell < order.length; cell++) columns.baseline[cell] = places[columns.baseline[cell]!]!;
    return {
      cells: order.length,
      binSeconds: this.seconds,
      firstCell: firstCells(columns.baseline, places.length),
      ...columns,
      ...gather(products, order, width),
    };
  }

  private fillProduct(products: ReturnType<typeof productColumns>, i: number): void {
    const sum = (k: number) => this.sums.products.value(i * PRODUCT_SUMS + k);
    const count = (k: number) => this.sums.counts[i * PRODUCT_COUNTS + k]!;
    products.usable[i] = count(USABLE);
    products.flagged[i] = count(FLAGGED);
    products.bad[i] = count(BAD);
    products.zero[i] = count(ZERO);
    products.weight[i] = sum(SUM_WEIGHT);
    products.real[i] = sum(SUM_REAL) / sum(SUM_WEIGHT);
    products.imag[i] = sum(SUM_IMAG) / sum(SUM_WEIGHT);
    products.amplitude[i] = sum(SUM_AMPLITUDE) / count(USABLE);
    products.slopeReal[i] = sum(SLOPE_REAL);
    products.slopeImag[i] = sum(SLOPE_IMAG);
  }

  /**
   * Rows of a bin beyond the integrations in it, one each of which a baseline may have. Where a baseline lacks some, as
   * many repeated rows are not seen.
   */
  duplicates(_tracks: TracksWithoutScans, times: Float64Array): number {
    let count = 0;
    for (const stream of this.streams.values()) {
      for (const [bin, cell] of stream.cells) {
        const rows = this.sums.given[cell * CELL_SUMS]!;
        const from = lowerBound(times, (bin * this.seconds) / SECONDS_PER_DAY);
        const to = lowerBound(times, ((bin + 1) * this.seconds) / SECONDS_PER_DAY);
        count += Math.max(0, rows - Math.max(1, to - from));
      }
    }
    return count;
  }
}

/** How many of ascending numbers are below a value. */
function lowerBound(values: Float64Array, value: number): number {
  let low = 0;
  let high = values.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (values[middle]! < value) low = middle + 1;
    else high = middle;
  }
  return low;
}
