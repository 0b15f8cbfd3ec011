/** The columns of Tracks in the making: rows of numbers that grow together and are put in order at the end. */
import type { Tracks } from "./survey-result.ts";

type Numbers =
  | Float32Array<ArrayBuffer>
  | Float64Array<ArrayBuffer>
  | Int32Array<ArrayBuffer>
  | Uint32Array<ArrayBuffer>;

/** Everything but the scans, which need the integrations of the whole array. */
export type TracksWithoutScans = Omit<Tracks, "scan">;

/** One number a cell. */
export interface CellColumns {
  readonly baseline: Int32Array<ArrayBuffer>;
  readonly time: Float64Array<ArrayBuffer>;
  readonly u: Float64Array<ArrayBuffer>;
  readonly v: Float64Array<ArrayBuffer>;
  readonly w: Float64Array<ArrayBuffer>;
  readonly field: Int32Array<ArrayBuffer>;
  readonly setup: Int32Array<ArrayBuffer>;
  readonly subarray: Int32Array<ArrayBuffer>;
  readonly integration: Float32Array<ArrayBuffer>;
}

/** One number a product of a cell. */
export interface ProductColumns {
  readonly real: Float32Array<ArrayBuffer>;
  readonly imag: Float32Array<ArrayBuffer>;
  readonly amplitude: Float32Array<ArrayBuffer>;
  readonly weight: Float32Array<ArrayBuffer>;
  readonly slopeReal: Float32Array<ArrayBuffer>;
  readonly slopeImag: Float32Array<ArrayBuffer>;
  readonly usable: Uint32Array<ArrayBuffer>;
  readonly flagged: Uint32Array<ArrayBuffer>;
  readonly bad: Uint32Array<ArrayBuffer>;
  readonly zero: Uint32Array<ArrayBuffer>;
}

/** Bytes of a cell and its place in the dataset, and of each of its products. */
export const CELL_BYTES = 68;
export const PRODUCT_BYTES = 40;

export function cellColumns(cells: number): CellColumns {
  return {
    baseline: new Int32Array(cells),
    time: new Float64Array(cells),
    u: new Float64Array(cells),
    v: new Float64Array(cells),
    w: new Float64Array(cells),
    field: new Int32Array(cells),
    setup: new Int32Array(cells),
    subarray: new Int32Array(cells),
    integration: new Float32Array(cells),
  };
}

export function productColumns(length: number): ProductColumns {
  return {
    real: new Float32Array(length),
    imag: new Float32Array(length),
    amplitude: new Float32Array(length),
    weight: new Float32Array(length),
    slopeReal: new Float32Array(length),
    slopeImag: new Float32Array(length),
    usable: new Uint32Array(length),
    flagged: new Uint32Array(length),
    bad: new Uint32Array(length),
    zero: new Uint32Array(length),
  };
}

/**
 * Columns with their first rows of `width` numbers put in `order`. The given ones are used up: each is let go before the
 * next is made, so that they are never there twice.
 */
export function gather<C extends CellColumns | ProductColumns>(
  columns: C,
  order: Uint32Array,
  width: number,
): C {
  return eachInTurn(columns, (column) => gatherColumn(column, order, width));
}

function gatherColumn<N extends Numbers>(column: N, order: Uint32Array, width: number): N {
  // In shared memory: threads of later passes see the tracks without copies of their own.
  const shared = new SharedArrayBuffer(order.length * width * column.BYTES_PER_ELEMENT);
  const out = new (column.constructor as new (buffer: SharedArrayBuffer) => N)(shared);
  for (let i = 0, at = 0; i < order.length; i++) {
    const from = order[i]! * width;
    for (let k = 0; k < width; k++) out[at++] = column[from + k]!;
  }
  return out;
}

/** Columns with room for `length` numbers, the first `used` taken over. The given ones are used up. */
export function resized<C extends CellColumns | ProductColumns>(columns: C, used: number, length: number): C {
  return eachInTurn(columns, (column) => {
    const grown = new (column.constructor as new (length: number) => Numbers)(length);
    grown.set(column.subarray(0, used) as never);
    return grown;
  });
}

function eachInTurn<C extends CellColumns | ProductColumns>(
  columns: C,
  make: (column: Numbers) => Numbers,
): C {
  const left = columns as unknown as Record<string, Numbers>;
  const made: Record<string, Numbers> = {};
  for (const name of Object.keys(left)) {
    made[name] = make(left[name]!);
    delete left[name];
  }
  return made as never;
}

/** Append the first `count` numbers of other columns. */
export function append<C extends CellColumns | ProductColumns>(
  ours: C,
  at: number,
  theirs: C,
  count: number,
): void {
  const from = theirs as unknown as Record<string, Numbers>;
  for (const [name, column] of Object.entries(ours as unknown as Record<string, Numbers>)) {
    column.set(from[name]!.subarray(0, count) as never, at);
  }
}

/** Move the rows of `width` numbers that stay to the front. @param stays (cells) 1 or 0 */
export function compact<C extends CellColumns | ProductColumns>(
  columns: C,
  stays: Uint8Array,
  width: number,
): void {
  for (const column of Object.values(columns as unknown as Record<string, Numbers>)) {
    for (let cell = 0, to = 0; cell < stays.length; cell++) {
      if (stays[cell] === 0) continue;
      for (let k = 0; k < width; k++) column[to++] = column[cell * width + k]!;
    }
  }
}

/**
 * Cells by baseline, then time, field, setup, sub-array and place in the dataset.
 *
 * @param places  new number of each baseline
 * @param place   (cells) what tells apart cells that are alike in all else
 */
export function orderOf(
  cells: number,
  columns: CellColumns,
  place: ArrayLike<number>,
  places: Int32Array,
): Uint32Array {
  const { baseline, time, field, setup, subarray } = columns;
  const next = new Uint32Array(places.length + 1);
  for (let cell = 0; cell < cells; cell++) next[places[baseline[cell]!]! + 1]! += 1;
  for (let i = 1; i < next.length; i++) next[i]! += next[i - 1]!;
  const first = next.slice();
  const order = new Uint32Array(cells);
  for (let cell = 0; cell < cells; cell++) order[next[places[baseline[cell]!]!]!++] = cell;
  const compare = (a: number, b: number): number =>
    time[a]! - time[b]! ||
    field[a]! - field[b]! ||
    setup[a]! - setup[b]! ||
    subarray[a]! - subarray[b]! ||
    place[a]! - place[b]!;
  for (let i = 0; i < places.length; i++) sortUnlessSorted(order.subarray(first[i]!, first[i + 1]!), compare);
  return order;
}

/** Rows of a baseline mostly come in order: only where they do not are they sorted. */
function sortUnlessSorted(order: Uint32Array, compare: (a: number, b: number) => number): void {
  for (let i = 1; i < order.length; i++) {
    if (compare(order[i - 1]!, order[i]!) > 0) {
      order.sort(compare);
      return;
    }
  }
}

/** (baselines + 1) first cell of each baseline of a sorted column. */
export function firstCells(baseline: Int32Array, baselines: number): Int32Array {
  const first = new Int32Array(baselines + 1);
  for (const index of baseline) first[index + 1]! += 1;
  for (let i = 0; i < baselines; i++) first[i + 1]! += first[i]!;
  return first;
}
