/**
 * What is kept of rows whose baselines are not looked at one by one, where there are too many: samples by antenna and by
 * what they are, weights, and spacings. A baseline that leaves the choice brings here what was counted of it before.
 */
import type { Shape } from "../dataset/dataset.ts";
import type { Accumulator } from "./accumulator.ts";
import { ExactSums } from "./exact-sums.ts";
import { type OtherRows, OtherSpacings } from "./other-spacings.ts";
import { FLAGGED_WEIGHT, KINDS, OTHER, type PreparedBlock, SUM_WEIGHT, SUMS, USABLE } from "./prepared.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** Sums a product over all of them: weight of usable samples, |weight| of flagged ones. */
const WEIGHTS = 2;

export class OtherBaselines implements Accumulator {
  readonly products: number;
  private readonly places = new Map<number, number>();
  /** (places x products x KINDS) every row at both its antennas; doubles hold counts beyond 2^32 exactly */
  private counts = new Float64Array(0);
  private readonly weights: ExactSums;
  private readonly spacings = new Map<string, OtherSpacings>();
  private lastSpacings: OtherSpacings | undefined;
  /** (products) usable weight of the row at hand */
  private readonly weight: Float32Array;

  constructor(shape: Shape) {
    this.products = shape.subbands * shape.polarizations;
    this.weights = new ExactSums(WEIGHTS * this.products);
    this.weight = new Float32Array(this.products);
  }

  add(prepared: PreparedBlock): void {
    const { baseline, block } = prepared;
    for (let row = 0; row < prepared.rows; row++) {
      if (baseline[row] !== OTHER) continue;
      const { products } = this;
      this.addCounts(block.antenna1[row]!, block.antenna2[row]!, prepared.counts, row * products);
      for (let k = 0; k < products; k++) {
        const from = (row * products + k) * SUMS;
        const usable = prepared.counts[(row * products + k) * KINDS + USABLE]!;
        this.weights.add(WEIGHTS * k, prepared.sums[from + SUM_WEIGHT]!);
        this.weights.add(WEIGHTS * k + 1, prepared.sums[from + FLAGGED_WEIGHT]!);
        this.setWeight(k, usable, prepared.sums[from + SUM_WEIGHT]!);
      }
      if (!Number.isFinite(block.time[row]!)) continue;
      this.spacingsOf(block.field[row]!, block.setup[row]!).add(block.u[row]!, block.v[row]!, this.weight);
    }
  }

  /** @param first product in `counts`, (products x KINDS), from which on they are the baseline's */
  addCounts(antenna1: number, antenna2: number, counts: ArrayLike<number>, first: number): void {
    const length = this.products * KINDS;
    const [one, other] = [this.placeOf(antenna1) * length, this.placeOf(antenna2) * length];
    for (let i = 0; i < length; i++) {
      const count = counts[first * KINDS + i]!;
      this.counts[one + i]! += count;
      this.counts[other + i]! += count;
    }
  }

  /** Add sums that were kept elsewhere. @param usable, flagged places in `sums` of a product's weights */
  addWeights(product: number, sums: ExactSums, usable: number, flagged: number): void {
    this.weights.merge(WEIGHTS * product, sums, usable);
    this.weights.merge(WEIGHTS * product + 1, sums, flagged);
  }

  /** Say what the next row to be added with `addSpacing` holds of a product. */
  setWeight(product: number, usable: number, weight: number): void {
    // As the tracks hold it.
    const held = Math.fround(weight);
    this.weight[product] = usable > 0 && held > 0 && held < Number.POSITIVE_INFINITY ? held : 0;
  }

  addSpacing(field: number, setup: number, u: number, v: number): void {
    this.spacingsOf(field, setup).add(u, v, this.weight);
  }

  private spacingsOf(field: number, setup: number): OtherSpacings {
    const { lastSpacings } = this;
    if (lastSpacings?.field === field && lastSpacings.setup === setup) return lastSpacings;
    const key = `${field} ${setup}`;
    let spacings = this.spacings.get(key);
    if (spacings === undefined) {
      spacings = new OtherSpacings(field, setup, this.products);
      this.spacings.set(key, spacings);
    }
    this.lastSpacings = spacings;
    return spacings;
  }

  private placeOf(antenna: number): number {
    let place = this.places.get(antenna);
    if (place !== undefined) return place;
    place = this.places.size;
    this.places.set(antenna, place);
    const needed = (place + 1) * this.products * KINDS;
    if (needed > this.counts.length) {
      const grown = new Float64Array(2 * needed);
      grown.set(this.counts);
      this.counts = grown;
    }
    return place;
  }

  merge(other: this): void {
    const length = this.products * KINDS;
    for (const [antenna, theirs] of other.places) {
      const ours = this.placeOf(antenna) * length;
      for (let i = 0; i < length; i++) this.counts[ours + i]! += other.counts[theirs * length + i]!;
    }
    for (let i = 0; i < WEIGHTS * this.products; i++) this.weights.merge(i, other.weights, i);
    for (const theirs of other.spacings.values()) this.spacingsOf(theirs.field, theirs.setup).merge(theirs);
  }

  state(): StateRecord {
    const { places, products, counts, weights, spacings } = this;
    return {
      antennas: Float64Array.from(places.keys()),
      counts: counts.slice(0, places.size * products * KINDS),
      weights: weights.state(WEIGHTS * products),
      spacings: [...spacings.values()].map((own) => own.state()),
    };
  }

  restore(from: StateReader, _baselines: number, setups: number): void {
    const antennas = from.finite(Float64Array, "antennas");
    for (const antenna of antennas) this.placeOf(antenna);
    if (this.places.size !== antennas.length) throw from.error("an antenna stands twice", "antennas");
    this.counts = from.counts(Float64Array, "counts", antennas.length * this.products * KINDS);
    this.weights.restore(from.child("weights"), WEIGHTS * this.products);
    for (const spacings of from.child("spacings").items()) {
      if (spacings === null) throw from.error("spacings are missing", "spacings");
      const field = spacings.integer("field", -LARGEST, LARGEST);
      this.spacingsOf(field, spacings.integer("setup", 0, setups - 1)).restore(spacings);
    }
  }

  release(): void {
    this.weights.release();
    for (const spacings of this.spacings.values()) spacings.release();
  }

  /** Antennas with any of them. */
  get antennas(): readonly number[] {
    return [...this.places.keys()];
  }

  /** Samples of an antenna's product of a kind. */
  count(antenna: number, product: number, kind: number): number {
    const place = this.places.get(antenna);
    return place === undefined ? 0 : this.counts[(place * this.products + product) * KINDS + kind]!;
  }

  /** Samples of a product of a kind; each is at two antennas. */
  countOfAll(product: number, kind: number): number {
    let sum = 0;
    for (const antenna of this.places.keys()) sum += this.count(antenna, product, kind);
    return sum / 2;
  }

  usableWeight(product: number): number {
    return this.weights.value(WEIGHTS * product);
  }

  flaggedWeight(product: number): number {
    return this.weights.value(WEIGHTS * product + 1);
  }

  /** By field, then setup. */
  rows(): OtherRows[] {
    const all = [...this.spacings.values()].map((own) => own.finish());
    return all.sort((a, b) => a.field - b.field || a.setup - b.setup);
  }
}

/** Of 32-bit numbers. */
const LARGEST = 2 ** 31;
