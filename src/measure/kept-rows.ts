/** The track cells of a dataset whose rows can all be kept: one a row. */
import type { Shape } from "../dataset/dataset.ts";
import type { OtherBaselines } from "./other-baselines.ts";
import {
  BAD,
  FLAGGED,
  KINDS,
  OTHER,
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
import { readColumns, usedOf } from "./state/columns.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";
import type { Baseline } from "./survey-result.ts";
import { TIME_STEP_DAYS } from "./time-order.ts";
import {
  append,
  CELL_BYTES,
  cellColumns,
  compact,
  firstCells,
  gather,
  orderOf,
  PRODUCT_BYTES,
  productColumns,
  resized,
  type TracksWithoutScans,
} from "./track-columns.ts";
import type { TrackKeeper } from "./track-keeper.ts";

export class KeptRows implements TrackKeeper {
  private readonly width: number;
  private cells = 0;
  private room = 1024;
  private columns = cellColumns(this.room);
  private products;
  /** place in the dataset; exact to 2^53 */
  private place = new Float64Array(this.room);

  constructor(shape: Shape) {
    this.width = shape.subbands * shape.polarizations;
    this.products = productColumns(this.room * this.width);
  }

  add(prepared: PreparedBlock): void {
    const { block, baseline, sign } = prepared;
    this.reserve(this.cells + prepared.rows);
    const { columns, place } = this;
    for (let row = 0; row < prepared.rows; row++) {
      const time = block.time[row]!;
      if (baseline[row]! < 0 || !Number.isFinite(time)) continue;
      const cell = this.cells++;
      const s = sign[row]!;
      place[cell] = block.firstRow + row;
      columns.baseline[cell] = baseline[row]!;
      columns.time[cell] = time;
      columns.u[cell] = s * block.u[row]!;
      columns.v[cell] = s * block.v[row]!;
      columns.w[cell] = s * block.w[row]!;
      columns.field[cell] = block.field[row]!;
      columns.setup[cell] = block.setup[row]!;
      columns.subarray[cell] = block.subarray[row]!;
      columns.integration[cell] = block.integration[row]!;
      this.addProducts(prepared, row, cell);
    }
  }

  private addProducts({ sums, counts }: PreparedBlock, row: number, cell: number): void {
    const { width, products } = this;
    for (let k = 0; k < width; k++) {
      const at = cell * width + k;
      const sum = (row * width + k) * SUMS;
      const count = (row * width + k) * KINDS;
      const usable = counts[count + USABLE]!;
      const weight = sums[sum + SUM_WEIGHT]!;
      // 0/0 is NaN, which is what a mean of nothing is.
      products.real[at] = sums[sum + SUM_REAL]! / weight;
      products.imag[at] = sums[sum + SUM_IMAG]! / weight;
      products.amplitude[at] = sums[sum + SUM_AMPLITUDE]! / usable;
      products.weight[at] = weight;
      products.slopeReal[at] = sums[sum + SLOPE_REAL]!;
      products.slopeImag[at] = sums[sum + SLOPE_IMAG]!;
      products.usable[at] = usable;
      products.flagged[at] = counts[count + FLAGGED]!;
      products.bad[at] = counts[count + BAD]!;
      products.zero[at] = counts[count + ZERO]!;
    }
  }

  expect(rows: number): void {
    this.reserve(this.cells + rows);
  }

  private reserve(cells: number): void {
    if (cells <= this.room) return;
    this.room = Math.max(cells, Math.ceil(this.room * 1.5));
    this.columns = resized(this.columns, this.cells, this.room);
    this.products = resized(this.products, this.cells * this.width, this.room * this.width);
    const place = new Float64Array(this.room);
    place.set(this.place.subarray(0, this.cells));
    this.place = place;
  }

  /** Bytes in use. */
  get bytes(): number {
    return this.cells * (CELL_BYTES + PRODUCT_BYTES * this.width);
  }

  thin(baselines: Int32Array, _before: readonly Baseline[], others: OtherBaselines): void {
    const { columns, products, place, width } = this;
    const { baseline, field, setup, u, v } = columns;
    const stays = new Uint8Array(this.cells);
    let kept = 0;
    for (let cell = 0; cell < this.cells; cell++) {
      const now = baselines[baseline[cell]!]!;
      if (now === OTHER) {
        for (let k = 0; k < width; k++) {
          others.setWeight(k, products.usable[cell * width + k]!, products.weight[cell * width + k]!);
        }
        others.addSpacing(field[cell]!, setup[cell]!, u[cell]!, v[cell]!);
        continue;
      }
      baseline[cell] = now;
      place[kept++] = place[cell]!;
      stays[cell] = 1;
    }
    compact(columns, stays, 1);
    compact(products, stays, width);
    this.cells = kept;
  }

  merge(other: this, baselines: Int32Array): void {
    this.reserve(this.cells + other.cells);
    append(this.columns, this.cells, other.columns, other.cells);
    append(this.products, this.cells * this.width, other.products, other.cells * this.width);
    this.place.set(other.place.subarray(0, other.cells), this.cells);
    for (let cell = this.cells; cell < this.cells + other.cells; cell++) {
      this.columns.baseline[cell] = baselines[this.columns.baseline[cell]!]!;
    }
    this.cells += other.cells;
  }

  state(): StateRecord {
    const { cells, width, columns, products, place } = this;
    return {
      cells,
      columns: usedOf(columns, cells),
      products: usedOf(products, cells * width),
      place: place.subarray(0, cells),
    };
  }

  restore(from: StateReader, baselines: number, setups: number): void {
    const cells = from.array(Float64Array, "place").length;
    this.place = from.counts(Float64Array, "place", cells);
    this.columns = readColumns(from.child("columns"), this.columns, cells);
    from.child("columns").indices(Int32Array, "baseline", cells, 0, baselines);
    from.child("columns").indices(Int32Array, "setup", cells, 0, setups);
    this.products = readColumns(from.child("products"), this.products, cells * this.width);
    this.cells = cells;
    this.room = cells;
  }

  tracks(places: Int32Array): TracksWithoutScans {
    const order = orderOf(this.cells, this.columns, this.place, places);
    const columns = gather(this.columns, order, 1);
    for (let cell = 0; cell < columns.baseline.length; cell++) {
      columns.baseline[cell] = places[columns.baseline[cell]!]!;
    }
    return {
      cells: this.cells,
      binSeconds: 0,
      firstCell: firstCells(columns.baseline, places.length),
      ...columns,
      ...gather(this.products, order, this.width),
    };
  }

  duplicates(tracks: TracksWithoutScans): number {
    const { baseline, time, field, setup, subarray } = tracks;
    let count = 0;
    for (let from = 0; from < tracks.cells; ) {
      // One integration of a baseline; its rows may be a step of their time apart.
      let to = from + 1;
      while (
        to < tracks.cells &&
        baseline[to] === baseline[from] &&
        time[to]! - time[from]! <= TIME_STEP_DAYS
      )
        to++;
      if (to > from + 1) {
        const seen = new Set<string>();
        for (let cell = from; cell < to; cell++) seen.add(`${field[cell]} ${setup[cell]} ${subarray[cell]}`);
        count += to - from - seen.size;
      }
      from = to;
    }
    return count;
  }
}
