/** Weights and spacings of rows whose baselines are not looked at one by one, by field and frequency setup. */
import { ExactSums } from "./exact-sums.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** Shortest spacings are kept by octave: which of them are of antennas at one place, the longest tells in the end. */
export const OCTAVES = 256;

/** What is known of them in the end. Spacings in seconds of light travel; NaN where there is none. */
export interface OtherRows {
  readonly field: number;
  readonly setup: number;
  /** (subbands x polarizations) sum of the usable weights */
  readonly weight: Float64Array;
  /** (subbands x polarizations) of usable samples: longest, and largest |u| or |v| */
  readonly longest: Float64Array;
  readonly extent: Float64Array;
  /** (subbands x polarizations x OCTAVES) of usable samples, shortest of each octave */
  readonly shortest: Float64Array;
  /** of any row, flagged ones too */
  readonly everLongest: number;
  /** (OCTAVES) */
  readonly everShortest: Float64Array;
}

const asFloat = new Float32Array(1);
const asBits = new Int32Array(asFloat.buffer);

export class OtherSpacings {
  readonly field: number;
  readonly setup: number;
  private readonly products: number;
  private readonly sums: ExactSums;
  /** (products + 1) of the products, and of any row */
  private readonly longest: Float64Array;
  private readonly extent: Float64Array;
  private readonly shortest: Float64Array;

  constructor(field: number, setup: number, products: number) {
    this.field = field;
    this.setup = setup;
    this.products = products;
    this.sums = new ExactSums(products);
    this.longest = new Float64Array(products + 1).fill(Number.NaN);
    this.extent = new Float64Array(products + 1).fill(Number.NaN);
    this.shortest = new Float64Array((products + 1) * OCTAVES).fill(Number.NaN);
  }

  /** @param weight (products) usable weight of a row; 0 where nothing is usable */
  add(u: number, v: number, weight: Float32Array): void {
    const { products } = this;
    const spacing = Math.hypot(u, v);
    const isKnown = Number.isFinite(spacing);
    const size = Math.max(Math.abs(u), Math.abs(v));
    asFloat[0] = spacing;
    const octave = asBits[0]! >>> 23;
    for (let k = 0; k < products; k++) {
      if (weight[k] === 0) continue;
      this.sums.add(k, weight[k]!);
      if (isKnown) this.note(k, spacing, size, octave);
    }
    if (isKnown) this.note(products, spacing, size, octave);
  }

  private note(k: number, spacing: number, size: number, octave: number): void {
    if (!(this.longest[k]! >= spacing)) this.longest[k] = spacing;
    if (!(this.extent[k]! >= size)) this.extent[k] = size;
    const at = k * OCTAVES + octave;
    if (!(this.shortest[at]! <= spacing)) this.shortest[at] = spacing;
  }

  merge(other: OtherSpacings): void {
    for (let k = 0; k < this.products; k++) this.sums.merge(k, other.sums, k);
    for (let k = 0; k <= this.products; k++) {
      if (other.longest[k]! >= 0 && !(this.longest[k]! >= other.longest[k]!))
        this.longest[k] = other.longest[k]!;
      if (other.extent[k]! >= 0 && !(this.extent[k]! >= other.extent[k]!)) this.extent[k] = other.extent[k]!;
    }
    for (let at = 0; at < this.shortest.length; at++) {
      const theirs = other.shortest[at]!;
      if (theirs >= 0 && !(this.shortest[at]! <= theirs)) this.shortest[at] = theirs;
    }
  }

  state(): StateRecord {
    const { field, setup, products, sums, longest, extent, shortest } = this;
    return { field, setup, sums: sums.state(products), longest, extent, shortest };
  }

  restore(from: StateReader): void {
    this.sums.restore(from.child("sums"), this.products);
    for (const key of ["longest", "extent", "shortest"] as const) {
      this[key].set(from.array(Float64Array, key, this[key].length));
    }
  }

  finish(): OtherRows {
    const { field, setup, products, sums, longest, extent, shortest } = this;
    return {
      field,
      setup,
      weight: Float64Array.from({ length: products }, (_, k) => sums.value(k)),
      longest: longest.slice(0, products),
      extent: extent.slice(0, products),
      shortest: shortest.slice(0, products * OCTAVES),
      everLongest: longest[products]!,
      everShortest: shortest.slice(products * OCTAVES),
    };
  }

  release(): void {
    this.sums.release();
  }
}
