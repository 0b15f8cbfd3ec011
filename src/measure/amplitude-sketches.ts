/** Amplitude sketches by baseline, sub-band, channel and polarization, and the usable samples that they hold. */
import type { Shape } from "../dataset/dataset.ts";
import type { Accumulator } from "./accumulator.ts";
import { AUTOCORRELATION, type PreparedBlock } from "./prepared.ts";
import { sharingLadder } from "./sharing-ladder.ts";
import { SketchBank } from "./sketch-bank.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** 32 buckets an octave: a quantile is within 1/65 of the exact one. */
const MANTISSA_BITS = 5;

export class AmplitudeSketches implements Accumulator {
  private readonly samples: number;
  private readonly bank: SketchBank;
  /** by baseline */
  private readonly rows: number[] = [];
  /** by baseline, only where there are any: (samples of a row) samples that are not usable */
  private readonly unusable: (Uint32Array | undefined)[] = [];

  /**
   * @param budget     bytes of the sketches: where they would take more, neighbouring channels share one
   * @param baselines  how many there will be, as far as the dataset tells
   */
  constructor(shape: Shape, budget: number, baselines: number) {
    this.samples = shape.subbands * shape.channels * shape.polarizations;
    this.bank = new SketchBank(sharingLadder(shape), MANTISSA_BITS, budget, baselines);
  }

  add(prepared: PreparedBlock): void {
    const { samples, bank, rows } = this;
    const { baseline: baselines, bits, whole } = prepared;
    for (let row = 0; row < prepared.rows; row++) {
      const baseline = baselines[row]!;
      if (baseline === AUTOCORRELATION) continue;
      const start = row * samples;
      bank.add(baseline, bits, start);
      rows[baseline] = (rows[baseline] ?? 0) + 1;
      if (whole[row] === 1) continue;
      const unusable = this.unusableOf(baseline);
      for (let i = 0; i < samples; i++) if (bits[start + i]! < 0) unusable[i]! += 1;
    }
  }

  private unusableOf(baseline: number): Uint32Array {
    let unusable = this.unusable[baseline];
    if (unusable === undefined) {
      unusable = new Uint32Array(this.samples);
      this.unusable[baseline] = unusable;
    }
    return unusable;
  }

  merge(other: this, baselines: Int32Array): void {
    this.bank.merge(other.bank, baselines);
    for (const [theirs, rows] of other.rows.entries()) {
      if (rows === undefined) continue;
      const ours = baselines[theirs]!;
      this.rows[ours] = (this.rows[ours] ?? 0) + rows;
      const counts = other.unusable[theirs];
      if (counts === undefined) continue;
      const unusable = this.unusableOf(ours);
      for (let i = 0; i < this.samples; i++) unusable[i]! += counts[i]!;
    }
  }

  state(): StateRecord {
    return {
      bank: this.bank.state(),
      rows: Float64Array.from(this.rows, (rows) => rows ?? 0),
      unusable: Array.from(this.unusable, (counts) => counts ?? null),
    };
  }

  restore(from: StateReader, baselines: number): void {
    this.bank.restore(from.child("bank"), baselines);
    for (const [baseline, rows] of from.counts(Float64Array, "rows").entries()) {
      if (baseline >= baselines) throw from.error(`there are only ${baselines} baselines`, "rows");
      this.rows[baseline] = rows;
    }
    for (const [baseline, counts] of from
      .arrays(Uint32Array, "unusable", this.samples, baselines)
      .entries()) {
      if (counts !== null) this.unusable[baseline] = counts;
    }
  }

  /**
   * Levels of one baseline.
   *
   * @param median  out (samples of a row) median amplitude; NaN where nothing is usable. Channels that share a sketch
   *                share its median.
   * @param count   out (samples of a row) usable samples
   */
  fill(baseline: number, median: Float32Array, count: Uint32Array): void {
    const rows = this.rows[baseline] ?? 0;
    const unusable = this.unusable[baseline];
    const shared = this.bank.map.sketch;
    const known = new Float32Array(this.bank.map.sketches);
    const asked = new Uint8Array(this.bank.map.sketches);
    for (let i = 0; i < this.samples; i++) {
      const sketch = shared[i]!;
      if (asked[sketch] === 0) {
        asked[sketch] = 1;
        known[sketch] = this.bank.quantile(baseline, sketch, 0.5);
      }
      count[i] = rows - (unusable === undefined ? 0 : unusable[i]!);
      median[i] = count[i]! > 0 ? known[sketch]! : Number.NaN;
    }
  }
}
