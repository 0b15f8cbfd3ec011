/** Amplitude sketches by baseline, sub-band, channel and polarization, and the usable samples that they hold. */
import type { Shape } from "../dataset/dataset.ts";
import { Arena, kernelMemory } from "../util/kernels/memory.ts";
import type { Accumulator } from "./accumulator.ts";
import { countKernels } from "./kernels/count-sketches.ts";
import { AUTOCORRELATION, OTHER, type PreparedBlock } from "./prepared.ts";
import type { SurveySettings } from "./settings.ts";
import { sharingLadder } from "./sharing-ladder.ts";
import { SketchBank } from "./sketch-bank.ts";
import type { SketchOwners } from "./sketch-owners.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** 32 buckets an octave: a quantile is within 1/65 of the exact one. */
const MANTISSA_BITS = 5;

/** Fills (samples of a row) medians and usable samples of a baseline. */
export type LevelReader = (baseline: number, median: Float32Array, count: Uint32Array) => void;

export class AmplitudeSketches implements Accumulator {
  private readonly samples: number;
  private readonly owners: SketchOwners;
  private readonly bank: SketchBank;
  /** by baseline */
  private readonly rows: number[] = [];
  /** by baseline, only where there are any: address of (samples of a row) uint32, samples that are not usable */
  private readonly unusable: (number | undefined)[] = [];
  private readonly arena: Arena = new Arena(this);

  /**
   * @param budget    bytes of the sketches: where they would take more, neighbouring channels share one
   * @param settings  how many baselines and antennas there will be, as far as the dataset tells
   */
  constructor(
    shape: Shape,
    budget: number,
    settings: Pick<SurveySettings, "baselines" | "antennas">,
    owners: SketchOwners,
  ) {
    this.owners = owners;
    const expected = owners.shared ? settings.antennas : settings.baselines;
    this.samples = shape.subbands * shape.channels * shape.polarizations;
    this.bank = new SketchBank(sharingLadder(shape), MANTISSA_BITS, budget, expected);
  }

  add(prepared: PreparedBlock): void {
    const { samples, bank, rows } = this;
    const { baseline: baselines, at, whole } = prepared;
    for (let row = 0; row < prepared.rows; row++) {
      const baseline = baselines[row]!;
      if (baseline === AUTOCORRELATION) continue;
      const bits = at.bits + 4 * row * samples;
      bank.addAt(this.owners.ofRow(prepared, row), bits);
      if (baseline === OTHER) continue;
      rows[baseline] = (rows[baseline] ?? 0) + 1;
      if (whole[row] === 0) countKernels.countUnusable(bits, samples, this.unusableOf(baseline));
    }
  }

  private unusableOf(baseline: number): number {
    let at = this.unusable[baseline];
    if (at === undefined) {
      at = this.arena.require(4 * this.samples);
      this.unusable[baseline] = at;
      this.counters(at).fill(0);
    }
    return at;
  }

  private counters(at: number): Uint32Array<SharedArrayBuffer> {
    return kernelMemory.heap.u32.subarray(at / 4, at / 4 + this.samples);
  }

  /** Give the memory back. Nothing can be asked or added after. */
  release(): void {
    this.bank.release();
    this.arena.release();
  }

  /** Sketches belong to antennas then, and stay. */
  thin(baselines: Int32Array): void {
    const { rows, unusable } = this;
    const known = Math.min(rows.length, baselines.length);
    for (let before = 0; before < known; before++) {
      const now = baselines[before]!;
      const at = unusable[before];
      if (now === OTHER) {
        if (at !== undefined) this.arena.release(at);
        continue;
      }
      rows[now] = rows[before] ?? 0;
      unusable[now] = at;
    }
    const kept = baselines.reduce((count, now) => count + (now === OTHER ? 0 : 1), 0);
    rows.length = Math.min(rows.length, kept);
    unusable.length = rows.length;
  }

  merge(other: this, baselines: Int32Array): void {
    this.bank.merge(other.bank, this.owners.joined(baselines));
    for (const [theirs, rows] of other.rows.entries()) {
      if (rows === undefined) continue;
      const ours = baselines[theirs]!;
      this.rows[ours] = (this.rows[ours] ?? 0) + rows;
      const counts = other.unusable[theirs];
      if (counts === undefined) continue;
      const unusable = this.counters(this.unusableOf(ours));
      const added = this.counters(counts);
      for (let i = 0; i < this.samples; i++) unusable[i]! += added[i]!;
    }
  }

  state(): StateRecord {
    return {
      bank: this.bank.state(),
      rows: Float64Array.from(this.rows, (rows) => rows ?? 0),
      // Copies: the kernels' memory stays with this thread.
      unusable: Array.from(this.unusable, (at) =>
        at === undefined ? null : Uint32Array.from(this.counters(at)),
      ),
    };
  }

  restore(from: StateReader, baselines: number): void {
    this.bank.restore(from.child("bank"), this.owners.count(baselines));
    for (const [baseline, rows] of from.counts(Float64Array, "rows").entries()) {
      if (baseline >= baselines) throw from.error(`there are only ${baselines} baselines`, "rows");
      this.rows[baseline] = rows;
    }
    for (const [baseline, counts] of from
      .arrays(Uint32Array, "unusable", this.samples, baselines)
      .entries()) {
      if (counts !== null) this.counters(this.unusableOf(baseline)).set(counts);
    }
  }

  /** A reader of the levels of baselines, when all rows have been added. */
  reader(): LevelReader {
    const { sketches } = this.bank.map;
    const medians = Array.from({ length: sketches }, (_, sketch) =>
      this.owners.reader((owner) => this.bank.quantile(owner, sketch, 0.5)),
    );
    return (baseline, median, count) => this.fill(medians, baseline, median, count);
  }

  /**
   * Levels of one baseline.
   *
   * @param median  out (samples of a row) median amplitude; NaN where nothing is usable. Channels that share a sketch
   *                share its median.
   * @param count   out (samples of a row) usable samples
   */
  private fill(
    medians: readonly ((baseline: number) => number)[],
    baseline: number,
    median: Float32Array,
    count: Uint32Array,
  ): void {
    const rows = this.rows[baseline] ?? 0;
    const at = this.unusable[baseline];
    const unusable = at === undefined ? undefined : this.counters(at);
    const shared = this.bank.map.sketch;
    const known = new Float32Array(this.bank.map.sketches);
    const asked = new Uint8Array(this.bank.map.sketches);
    for (let i = 0; i < this.samples; i++) {
      const sketch = shared[i]!;
      if (asked[sketch] === 0) {
        asked[sketch] = 1;
        known[sketch] = medians[sketch]!(baseline);
      }
      count[i] = rows - (unusable === undefined ? 0 : unusable[i]!);
      median[i] = count[i]! > 0 ? known[sketch]! : Number.NaN;
    }
  }
}
