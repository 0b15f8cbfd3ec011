/** Samples of each baseline, sub-band and polarization by what they are, and their weights. */
import type { Shape } from "../dataset/dataset.ts";
import { Arena, kernelMemory } from "../util/kernels/memory.ts";
import type { Accumulator } from "./accumulator.ts";
import { ExactSums } from "./exact-sums.ts";
import type { OtherBaselines } from "./other-baselines.ts";
import {
  AUTOCORRELATION,
  FLAGGED_WEIGHT,
  KINDS,
  OTHER,
  type PreparedBlock,
  SUM_SQUARE,
  SUM_WEIGHT,
  SUMS,
  USABLE,
} from "./prepared.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";
import type { Baseline } from "./survey-result.ts";

/** Sums a product: weight of usable samples, |weight| of flagged ones, effective number of usable ones. */
const WEIGHTS = 3;

export class BaselineTally implements Accumulator {
  readonly products: number;
  autocorrelationRows = 0;
  /** (baselines x products x KINDS); doubles hold counts beyond 2^32 exactly */
  private counts = new Float64Array(0);
  /** (baselines x products x WEIGHTS) */
  private weights = new ExactSums(0);

  private readonly arena: Arena = new Arena(this);
  /** address of (products x WEIGHTS) float64: those of one row */
  private row: { readonly values: number } | undefined;

  constructor(shape: Shape) {
    this.products = shape.subbands * shape.polarizations;
  }

  add(prepared: PreparedBlock): void {
    const { products, weights } = this;
    for (let row = 0; row < prepared.rows; row++) {
      const baseline = prepared.baseline[row]!;
      if (baseline === AUTOCORRELATION) {
        this.autocorrelationRows += 1;
        continue;
      }
      if (baseline === OTHER) continue;
      this.reserve(baseline);
      const from = row * products;
      const to = baseline * products;
      for (let k = 0; k < products * KINDS; k++) {
        this.counts[to * KINDS + k]! += prepared.counts[from * KINDS + k]!;
      }
      const { values } = this.placed();
      const { f64 } = kernelMemory.heap;
      for (let k = 0; k < products; k++) {
        const sum = (from + k) * SUMS;
        const at = values / 8 + WEIGHTS * k;
        const weight = prepared.sums[sum + SUM_WEIGHT]!;
        f64[at] = weight;
        f64[at + 1] = prepared.sums[sum + FLAGGED_WEIGHT]!;
        f64[at + 2] = weight > 0 ? (weight * weight) / prepared.sums[sum + SUM_SQUARE]! : 0;
      }
      weights.addGroups(WEIGHTS * to, values, 0, 1, WEIGHTS * products);
    }
  }

  /** Give the memory back. Nothing can be asked or added after. */
  release(): void {
    this.weights.release();
    this.arena.release();
    this.row = undefined;
  }

  private placed(): { readonly values: number } {
    this.row ??= { values: this.arena.require(8 * WEIGHTS * this.products) };
    return this.row;
  }

  private reserve(baseline: number): void {
    const needed = (baseline + 1) * this.products;
    if (this.counts.length >= needed * KINDS) return;
    const room = Math.max(needed, 64 * this.products, Math.ceil((1.5 * this.counts.length) / KINDS));
    const counts = new Float64Array(room * KINDS);
    counts.set(this.counts);
    this.counts = counts;
    this.weights.grow(WEIGHTS * room);
  }

  thin(baselines: Int32Array, before: readonly Baseline[], others: OtherBaselines): void {
    const { products, counts, weights } = this;
    this.counts = new Float64Array(0);
    this.weights = new ExactSums(0);
    for (const [number, now] of baselines.entries()) {
      const first = number * products;
      if (first * KINDS >= counts.length) break;
      if (now === OTHER) {
        others.addCounts(before[number]!.antenna1, before[number]!.antenna2, counts, first);
        for (let k = first; k < first + products; k++) {
          others.addWeights(k - first, weights, WEIGHTS * k, WEIGHTS * k + 1);
        }
        continue;
      }
      this.reserve(now);
      this.counts.set(counts.subarray(first * KINDS, (first + products) * KINDS), now * products * KINDS);
      for (let i = 0; i < WEIGHTS * products; i++) {
        this.weights.merge(WEIGHTS * now * products + i, weights, WEIGHTS * first + i);
      }
    }
    weights.release();
  }

  merge(other: this, baselines: Int32Array): void {
    const { products } = this;
    this.autocorrelationRows += other.autocorrelationRows;
    for (const [theirs, ours] of baselines.entries()) {
      this.reserve(ours);
      for (let k = 0; k < products; k++) {
        const from = theirs * products + k;
        const to = ours * products + k;
        if (from * KINDS >= other.counts.length) continue;
        for (let kind = 0; kind < KINDS; kind++) {
          this.counts[to * KINDS + kind]! += other.counts[from * KINDS + kind]!;
        }
        for (let i = 0; i < WEIGHTS; i++)
          this.weights.merge(WEIGHTS * to + i, other.weights, WEIGHTS * from + i);
      }
    }
  }

  state(): StateRecord {
    const { autocorrelationRows, counts, weights } = this;
    return { autocorrelationRows, counts, weights: weights.state(weights.length) };
  }

  restore(from: StateReader): void {
    this.autocorrelationRows = from.integer("autocorrelationRows");
    this.counts = from.counts(Float64Array, "counts");
    const places = this.counts.length / KINDS;
    if (!Number.isInteger(places)) throw from.error(`expected ${KINDS} a product`, "counts");
    this.weights.restore(from.child("weights"), WEIGHTS * places);
  }

  /** Samples of a baseline's product that are of a kind. */
  count(baseline: number, product: number, kind: number): number {
    return this.counts[(baseline * this.products + product) * KINDS + kind] ?? 0;
  }

  /** Sum of the weights of usable samples. */
  usableWeight(baseline: number, product: number): number {
    return this.weightAt(baseline, product, 0);
  }

  /** Sum of |weight| of flagged samples. */
  flaggedWeight(baseline: number, product: number): number {
    return this.weightAt(baseline, product, 1);
  }

  /** How even the weights along the channels are: 1 where they are equal (Kish's effective number over the number). */
  evenness(baseline: number, product: number): number {
    return this.weightAt(baseline, product, 2) / this.count(baseline, product, USABLE);
  }

  private weightAt(baseline: number, product: number, which: number): number {
    const index = WEIGHTS * (baseline * this.products + product) + which;
    return index < this.weights.length ? this.weights.value(index) : 0;
  }
}
