/**
 * Sampled (u, v) gathered in square cells of 1/field: of each filled cell the weight, where in the cell it lies
 * (Legendre moments) and the noise it carries. Only half the plane is held: a sample with negative u is turned into
 * its conjugate. Everything added is rounded to a fixed power of two, so the sums are the same in whatever order the
 * samples come.
 */
import { fillLegendre, momentCount } from "./legendre.ts";

export interface GridForm {
  /** cells a wavelength: the width of the field, radians */
  readonly field: number;
  /** cells from the origin to the edge */
  readonly half: number;
  /** highest total order of the moments */
  readonly order: number;
  /** no sum of weights exceeds it */
  readonly weightBound: number;
  /** no sum of weighted variances (noise) exceeds it */
  readonly noiseBound: number;
}

/** The filled cells in order of (iu, iv). */
export interface FilledCells {
  readonly form: GridForm;
  readonly count: number;
  /** (count) 0..half */
  readonly iu: Int32Array;
  /** (count) -half..half; not negative where iu is 0 */
  readonly iv: Int32Array;
  /** (count) sum of weights */
  readonly weight: Float64Array;
  /** (count) sum of weight^2 x variance */
  readonly noise: Float64Array;
  /** (count x momentCount) sum of weight P_a(2 du) P_b(2 dv), a from 0, then b from 0; the first is the weight */
  readonly moments: Float64Array;
}

/** The sums of a grid as plain data. */
export interface GridState {
  /** (filled) cells by their place in the half plane */
  readonly cells: Int32Array<ArrayBuffer>;
  /** (filled x sums of a cell) */
  readonly sums: Float64Array<ArrayBuffer>;
  readonly outside: number;
}

const NONE = -1;

/** Where the cells of a grid are kept; grids of the same form may share one. */
export class CellIndex {
  private readonly slotOf: Int32Array;
  readonly columns: number;
  readonly half: number;
  slots = 0;

  constructor(half: number) {
    this.half = half;
    this.columns = 2 * half + 1;
    this.slotOf = new Int32Array((half + 1) * this.columns).fill(NONE);
  }

  /** The cell's slot, given on first asking. */
  slot(iu: number, iv: number): number {
    const cell = iu * this.columns + iv + this.half;
    const slot = this.slotOf[cell]!;
    if (slot !== NONE) return slot;
    this.slotOf[cell] = this.slots;
    this.slots += 1;
    return this.slots - 1;
  }

  /** The cell's slot, or -1 when it has none. */
  peek(iu: number, iv: number): number {
    return this.slotOf[iu * this.columns + iv + this.half]!;
  }

  /** (slots) the cell of each, as a place in the half plane. */
  cellOf(): Int32Array {
    const cells = new Int32Array(this.slots);
    for (let cell = 0; cell < this.slotOf.length; cell++) {
      const slot = this.slotOf[cell]!;
      if (slot !== NONE) cells[slot] = cell;
    }
    return cells;
  }

  /** Slots and the cells they stand for, in order of (iu, iv). */
  *inOrder(): Generator<readonly [slot: number, iu: number, iv: number]> {
    for (let cell = 0; cell < this.slotOf.length; cell++) {
      const slot = this.slotOf[cell]!;
      if (slot !== NONE) yield [slot, Math.floor(cell / this.columns), (cell % this.columns) - this.half];
    }
  }
}

export class MomentGrid {
  readonly form: GridForm;
  readonly index: CellIndex;
  private readonly moments: number;
  private readonly stride: number;
  /** (slots of the index) place of the slot's sums plus 1, or 0: a grid of few cells stays small */
  private placeOf = new Int32Array(1024);
  private sums: Float64Array<ArrayBuffer>;
  private places = 0;
  private readonly field: number;
  private readonly half: number;
  private readonly order: number;
  private readonly alongV: Float64Array;
  private readonly roundWeight: number;
  private readonly roundNoise: number;
  /** samples beyond the edge of the grid, which a caller who sized it rightly never sees */
  outside = 0;

  constructor(form: GridForm, index = new CellIndex(form.half)) {
    this.form = form;
    this.index = index;
    this.moments = momentCount(form.order);
    this.stride = this.moments + 1;
    this.sums = new Float64Array(256 * this.stride);
    this.field = form.field;
    this.half = form.half;
    this.order = form.order;
    this.alongV = new Float64Array(form.order + 1);
    this.roundWeight = rounder(form.weightBound);
    this.roundNoise = rounder(form.noiseBound);
  }

  /**
   * @param u,v wavelengths
   * @param weight finite
   * @param noise weight^2 x variance of the sample, or 0 where unknown
   */
  add(u: number, v: number, weight: number, noise: number): void {
    const { field, half, order } = this;
    let x = u * field;
    let y = v * field;
    if (turned(x, y)) {
      x = -x;
      y = -y;
    }
    const iu = Math.floor(x + 0.5);
    const iv = Math.floor(y + 0.5);
    if (!(iu <= half && iv <= half && iv >= -half)) {
      this.outside += 1;
      return;
    }
    let at = this.place(this.index.slot(iu, iv));
    const { alongV, sums, roundWeight } = this;
    fillLegendre(2 * (y - iv), order, alongV);
    const t = 2 * (x - iu);
    // P_a(t) by its recurrence, from P_0 and P_-1.
    let part = weight;
    let before = 0;
    for (let a = 0; a <= order; a++) {
      const last = order - a;
      for (let b = 0; b <= last; b++) {
        // Adding a large number and taking it away rounds to its last place.
        sums[at]! += part * alongV[b]! + roundWeight - roundWeight;
        at += 1;
      }
      const next = ((2 * a + 1) * t * part - a * before) / (a + 1);
      before = part;
      part = next;
    }
    sums[at]! += noise + this.roundNoise - this.roundNoise;
  }

  /** Offset of a slot's sums, which are made on first asking. */
  private place(slot: number): number {
    if (slot >= this.placeOf.length) {
      const larger = new Int32Array(Math.max(slot + 1, this.placeOf.length * 2));
      larger.set(this.placeOf);
      this.placeOf = larger;
    }
    const place = this.placeOf[slot]!;
    if (place !== 0) return (place - 1) * this.stride;
    this.places += 1;
    this.placeOf[slot] = this.places;
    if (this.places * this.stride > this.sums.length) {
      const larger = new Float64Array(this.sums.length * 2);
      larger.set(this.sums);
      this.sums = larger;
    }
    return (this.places - 1) * this.stride;
  }

  /** The sums by cell, for another thread. @param cellOf from the index */
  state(cellOf: Int32Array): GridState {
    const { places, stride, sums, outside } = this;
    const cells = new Int32Array(places);
    for (let slot = 0; slot < Math.min(cellOf.length, this.placeOf.length); slot++) {
      const place = this.placeOf[slot]!;
      if (place !== 0) cells[place - 1] = cellOf[slot]!;
    }
    return { cells, sums: sums.slice(0, places * stride), outside };
  }

  /** Add what another thread has summed in a grid of the same form. Sums are exact: the order does not matter. */
  merge({ cells, sums, outside }: GridState): void {
    const { index, stride } = this;
    for (let i = 0; i < cells.length; i++) {
      const cell = cells[i]!;
      const slot = index.slot(Math.floor(cell / index.columns), (cell % index.columns) - index.half);
      const at = this.place(slot);
      for (let k = 0; k < stride; k++) this.sums[at + k]! += sums[i * stride + k]!;
    }
    this.outside += outside;
  }

  /** bytes held, without the index */
  get bytes(): number {
    return this.sums.byteLength + this.placeOf.byteLength;
  }

  /** The filled cells as they are now; a copy. */
  cells(): FilledCells {
    const { form, moments, stride, sums, places } = this;
    const result = {
      form,
      count: 0,
      iu: new Int32Array(places),
      iv: new Int32Array(places),
      weight: new Float64Array(places),
      noise: new Float64Array(places),
      moments: new Float64Array(places * moments),
    };
    for (const [slot, iu, iv] of this.index.inOrder()) {
      const place = this.placeOf[slot] ?? 0;
      const from = (place - 1) * stride;
      if (place === 0 || !(sums[from]! > 0)) continue;
      const i = result.count;
      result.iu[i] = iu;
      result.iv[i] = iv;
      result.weight[i] = sums[from]!;
      result.noise[i] = sums[from + moments]!;
      result.moments.set(sums.subarray(from, from + moments), i * moments);
      result.count += 1;
    }
    return result;
  }
}

/**
 * Whether a sample is turned into its conjugate: where u is negative, and in the strip along the v axis, which holds
 * samples of both signs of u, where v is.
 *
 * @param x,y in cells
 */
export function turned(x: number, y: number): boolean {
  const turn = x < 0 || (x === 0 && y < 0);
  const across = turn ? -x : x;
  const along = turn ? -y : y;
  return across < 0.5 && along < -0.5 ? !turn : turn;
}

/** Finds a filled cell's place by its (iu, iv); -1 where it is not filled. */
export function fieldCells(cells: FilledCells): (iu: number, iv: number) => number {
  const { half } = cells.form;
  const index = new CellIndex(half);
  // Slots are given in the order of asking: a cell's slot is its place.
  for (let i = 0; i < cells.count; i++) index.slot(cells.iu[i]!, cells.iv[i]!);
  return (iu, iv) => (iu >= 0 && iu <= half && iv >= -half && iv <= half ? index.peek(iu, iv) : -1);
}

/**
 * A number so large that adding it to a term and taking it away again rounds the term to a multiple of 2^-50 of the
 * bound, rounded up to a power of two. Such multiples add up exactly, in any order.
 */
function rounder(bound: number): number {
  if (!(bound > 0 && bound < Number.POSITIVE_INFINITY)) return 0;
  const quantum = 2 ** (Math.ceil(Math.log2(bound)) - 50);
  return 1.5 * 2 ** 52 * quantum;
}
