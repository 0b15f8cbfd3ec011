/** Samples of each sub-band, channel and polarization by what they are, over all cross-correlations. */
import type { Shape } from "../dataset/dataset.ts";
import { Arena, kernelMemory } from "../util/kernels/memory.ts";
import type { Accumulator } from "./accumulator.ts";
import { countKernels } from "./kernels/count-sketches.ts";
import { AUTOCORRELATION, BAD, FLAGGED, type PreparedBlock, USABLE, ZERO } from "./prepared.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** Kinds a sample may be, USABLE among them. */
const KINDS = 1 + Math.max(FLAGGED, BAD, ZERO);

/** Rows that counts of 32 bits hold for certain. */
const MOST_LATEST = 2 ** 31;

export class ChannelCounts implements Accumulator {
  private readonly samples: number;
  /** (kinds x samples of a row), none of them usable; less what is in `latest` */
  private readonly odd: Float64Array;
  private rows = 0;
  private readonly arena: Arena = new Arena(this);
  /** address of (kinds but usable x samples of a row) uint32; undefined while there is none */
  private latest: number | undefined;
  /** rows in it */
  private latestRows = 0;

  constructor(shape: Shape) {
    this.samples = shape.subbands * shape.channels * shape.polarizations;
    this.odd = new Float64Array(KINDS * this.samples);
  }

  add(prepared: PreparedBlock): void {
    const { baseline, at, whole } = prepared;
    const { samples } = this;
    for (let row = 0; row < prepared.rows; row++) {
      if (baseline[row] === AUTOCORRELATION) continue;
      this.rows += 1;
      if (whole[row] === 1) continue;
      countKernels.countKinds(at.bits + 4 * row * samples, samples, KINDS - 1, this.placed());
      this.latestRows += 1;
    }
    if (this.latestRows > MOST_LATEST) this.drain();
  }

  private placed(): number {
    if (this.latest === undefined) {
      const length = (KINDS - 1) * this.samples;
      this.latest = this.arena.require(4 * length);
      kernelMemory.heap.u32.fill(0, this.latest / 4, this.latest / 4 + length);
    }
    return this.latest;
  }

  /** Put all counts in one place. */
  private drain(): void {
    if (this.latest === undefined) return;
    const { odd, samples } = this;
    const length = (KINDS - 1) * samples;
    const latest = kernelMemory.heap.u32.subarray(this.latest / 4, this.latest / 4 + length);
    for (let i = 0; i < length; i++) odd[samples + i]! += latest[i]!;
    this.release();
  }

  /** Give the memory back, and what is counted in it. */
  release(): void {
    this.arena.release();
    this.latest = undefined;
    this.latestRows = 0;
  }

  merge(other: this): void {
    other.drain();
    for (let i = 0; i < this.odd.length; i++) this.odd[i]! += other.odd[i]!;
    this.rows += other.rows;
  }

  state(): StateRecord {
    this.drain();
    return { odd: this.odd, rows: this.rows };
  }

  restore(from: StateReader): void {
    this.odd.set(from.counts(Float64Array, "odd", this.odd.length));
    this.rows = from.integer("rows");
  }

  /**
   * @param kind    USABLE, FLAGGED, BAD or ZERO
   * @param sample  (subband x channels + channel) x polarizations + polarization
   */
  of(kind: number, sample: number): number {
    this.drain();
    const odd = (what: number) => this.odd[what * this.samples + sample]!;
    return kind === USABLE ? this.rows - odd(FLAGGED) - odd(BAD) - odd(ZERO) : odd(kind);
  }
}
