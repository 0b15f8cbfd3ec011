/**
 * The cells that become the Tracks: one a row, or, where rows are too many to keep, one a baseline and time bin. Sums
 * that cross rows add multiples of the survey's quantum, so that they are the same whatever order the rows come in.
 */
import type { Shape } from "../dataset/dataset.ts";
import { toMultiple } from "../util/exact-sum.ts";
import type { Accumulator } from "./accumulator.ts";
import { GrowingColumn } from "./column-store.ts";
import { AUTOCORRELATION, type PreparedBlock } from "./prepared.ts";
import { KINDS, RowSums, SUMS } from "./row-sums.ts";
import type { SurveySettings } from "./settings.ts";

const SECONDS_A_DAY = 86_400;
/** Cells that are added before those of one bin are put together. */
const BATCH = 1 << 16;

export class TrackCells implements Accumulator {
  private readonly settings: SurveySettings;
  private readonly row: RowSums;
  readonly products: number;
  cells = 0;
  /** bins only: cells after they were last put together */
  private together = 0;
  readonly baseline = new GrowingColumn(Int32Array);
  /** place in the dataset; exact to 2^53 */
  readonly place = new GrowingColumn(Float64Array);
  readonly time = new GrowingColumn(Float64Array);
  readonly u = new GrowingColumn(Float64Array);
  readonly v = new GrowingColumn(Float64Array);
  readonly w = new GrowingColumn(Float64Array);
  readonly field = new GrowingColumn(Int32Array);
  readonly setup = new GrowingColumn(Int32Array);
  readonly subarray = new GrowingColumn(Int32Array);
  readonly integration = new GrowingColumn(Float32Array);
  /** (cells x products x SUMS) */
  readonly sums: GrowingColumn<Float32Array> | GrowingColumn<Float64Array>;
  /** (cells x products x KINDS) */
  readonly counts: GrowingColumn<Uint32Array>;

  constructor(shape: Shape, settings: SurveySettings) {
    this.settings = settings;
    this.row = new RowSums(shape);
    this.products = shape.subbands * shape.polarizations;
    const width = this.products * SUMS;
    this.sums =
      settings.binSeconds > 0
        ? new GrowingColumn(Float64Array, width)
        : new GrowingColumn(Float32Array, width);
    this.counts = new GrowingColumn(Uint32Array, this.products * KINDS);
  }

  private get columns(): readonly GrowingColumn<Float32Array | Float64Array | Int32Array | Uint32Array>[] {
    const { baseline, place, time, u, v, w, field, setup, subarray, integration, sums, counts } = this;
    return [baseline, place, time, u, v, w, field, setup, subarray, integration, sums, counts] as never;
  }

  add(prepared: PreparedBlock): void {
    for (const column of this.columns) column.reserve(this.cells + prepared.rows);
    const { block } = prepared;
    const quantum = this.settings.binSeconds > 0 ? this.settings.sumQuantum : 0;
    for (let row = 0; row < prepared.rows; row++) {
      const baseline = prepared.baseline[row]!;
      if (baseline === AUTOCORRELATION) continue;
      const cell = this.cells++;
      const sign = prepared.sign[row]!;
      this.baseline.array[cell] = baseline;
      this.place.array[cell] = block.firstRow + row;
      this.time.array[cell] = block.time[row]!;
      this.u.array[cell] = sign * block.u[row]!;
      this.v.array[cell] = sign * block.v[row]!;
      this.w.array[cell] = sign * block.w[row]!;
      this.field.array[cell] = block.field[row]!;
      this.setup.array[cell] = block.setup[row]!;
      this.subarray.array[cell] = block.subarray[row]!;
      this.integration.array[cell] = block.integration[row]!;
      this.row.take(prepared, row);
      this.putSums(cell, quantum);
      this.counts.array.set(this.row.counts, cell * this.products * KINDS);
    }
    this.putTogetherWhenFull();
  }

  private putSums(cell: number, quantum: number): void {
    const { sums } = this.row;
    const out = this.sums.array;
    const first = cell * this.products * SUMS;
    for (let k = 0; k < sums.length; k++) {
      out[first + k] = quantum > 0 ? toMultiple(sums[k]!, quantum) : sums[k]!;
    }
  }

  merge(other: this, baselines: Int32Array): void {
    const theirs = other.columns;
    for (const [i, column] of this.columns.entries()) {
      column.reserve(this.cells + other.cells);
      column.array.set(
        theirs[i]!.array.subarray(0, other.cells * column.width) as never,
        this.cells * column.width,
      );
    }
    for (let cell = this.cells; cell < this.cells + other.cells; cell++) {
      this.baseline.array[cell] = baselines[this.baseline.array[cell]!]!;
    }
    this.cells += other.cells;
    this.putTogetherWhenFull();
  }

  private putTogetherWhenFull(): void {
    if (this.settings.binSeconds > 0 && this.cells > this.together + BATCH) this.putTogether();
  }

  /** Number of a cell's time bin; cells without a time share one. */
  private bin(cell: number): number {
    const time = this.time.array[cell]!;
    return Number.isFinite(time) ? Math.floor((time * SECONDS_A_DAY) / this.settings.binSeconds) : -1;
  }

  /**
   * Cells by baseline, time bin (or time), field, setup, sub-array and place in the dataset.
   *
   * @param places  new number of each baseline
   */
  order(places: Int32Array): Uint32Array {
    const { baseline, time, field, setup, subarray, place } = this;
    const binned = this.settings.binSeconds > 0;
    const when = Float64Array.from({ length: this.cells }, (_, cell) =>
      binned ? this.bin(cell) : time.array[cell]!,
    );
    const order = Uint32Array.from({ length: this.cells }, (_, cell) => cell);
    return order.sort(
      (a, b) =>
        places[baseline.array[a]!]! - places[baseline.array[b]!]! ||
        byNumber(when[a]!, when[b]!) ||
        field.array[a]! - field.array[b]! ||
        setup.array[a]! - setup.array[b]! ||
        subarray.array[a]! - subarray.array[b]! ||
        place.array[a]! - place.array[b]!,
    );
  }

  /** Make one cell of all those of a baseline, time bin, field, setup and sub-array: that of its earliest row. */
  putTogether(): void {
    if (this.settings.binSeconds === 0) return;
    const same = Int32Array.from(
      { length: 1 + Math.max(-1, ...new Set(this.baseline.array.subarray(0, this.cells))) },
      (_, i) => i,
    );
    const order = this.order(same);
    const firsts: number[] = [];
    for (const cell of order) {
      const first = firsts.at(-1);
      if (first !== undefined && this.sameBin(first, cell)) this.addCell(first, cell);
      else firsts.push(cell);
    }
    for (const column of this.columns) column.array = column.gather(firsts);
    this.cells = firsts.length;
    this.together = this.cells;
  }

  private sameBin(a: number, b: number): boolean {
    const { baseline, field, setup, subarray } = this;
    return (
      baseline.array[a] === baseline.array[b] &&
      field.array[a] === field.array[b] &&
      setup.array[a] === setup.array[b] &&
      subarray.array[a] === subarray.array[b] &&
      this.bin(a) === this.bin(b)
    );
  }

  private addCell(into: number, from: number): void {
    for (const column of [this.sums, this.counts]) {
      const { array, width } = column;
      for (let k = 0; k < width; k++) array[into * width + k]! += array[from * width + k]!;
    }
  }
}

/** Ascending, with what is not a number last. */
export function byNumber(a: number, b: number): number {
  if (Number.isNaN(a)) return Number.isNaN(b) ? 0 : 1;
  if (Number.isNaN(b)) return -1;
  return a - b;
}
