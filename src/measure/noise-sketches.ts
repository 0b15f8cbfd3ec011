/**
 * What the noise is measured from: differences between neighbouring channels, in which a smooth sky and passband
 * cancel. Their medians are later turned into noise by `channel-noise.ts` and `levels.ts`.
 *
 * The main one is the second difference V(c-1) - 2 V(c) + V(c+1), which a constant and a slope leave at 0. Its modulus
 * is Rayleigh distributed for noise, one number of which says as much as its real and imaginary parts apart. First
 * differences over one, two and three channels, of all baselines together, tell whether channels were smoothed.
 */
import type { Shape } from "../dataset/dataset.ts";
import { Arena } from "../util/kernels/memory.ts";
import type { Accumulator } from "./accumulator.ts";
import { differenceKernels } from "./kernels/differences.ts";
import { AUTOCORRELATION, type PreparedBlock } from "./prepared.ts";
import type { SurveySettings } from "./settings.ts";
import { type SketchMap, sharingLadder } from "./sharing-ladder.ts";
import { SketchBank } from "./sketch-bank.ts";
import type { SketchOwners } from "./sketch-owners.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** 64 buckets an octave, and the place inside the bucket by rank. */
const MANTISSA_BITS = 6;
/** Spans of first differences, channels. */
export const SPANS = [1, 2, 3] as const;

export class NoiseSketches implements Accumulator {
  readonly shape: Shape;
  private readonly samples: number;
  private readonly owners: SketchOwners;
  private readonly every: number;
  private readonly channelEvery: number;
  private readonly spansEvery: number;
  /** sketches by baseline, sub-band and polarization */
  private readonly byBaseline: SketchBank;
  /** sketches by sub-band, channel and polarization; one owner */
  private readonly byChannel: SketchBank;
  /** owners: the second difference, then the spans; sketches by sub-band */
  private readonly bySpan: SketchBank;
  private readonly arena: Arena = new Arena(this);
  /** address of (samples) int32: bits of a row's differences; undefined before the first */
  private bits: number | undefined;

  constructor(
    shape: Shape,
    budget: number,
    { baselines, antennas, noiseEvery, channelEvery, spansEvery }: SurveySettings,
    owners: SketchOwners,
  ) {
    this.owners = owners;
    this.shape = shape;
    this.samples = shape.subbands * shape.channels * shape.polarizations;
    this.every = noiseEvery;
    this.channelEvery = channelEvery;
    this.spansEvery = spansEvery;
    this.byBaseline = new SketchBank(
      sharingLadder(shape, shape.channels),
      MANTISSA_BITS,
      budget / 2,
      owners.shared ? antennas : baselines,
    );
    this.byChannel = new SketchBank(sharingLadder(shape), MANTISSA_BITS, budget / 4, 1);
    this.bySpan = new SketchBank([bySubband(shape)], MANTISSA_BITS, budget / 4, 1 + SPANS.length);
  }

  add(prepared: PreparedBlock): void {
    if (this.shape.channels < 2) return;
    const { baseline, block } = prepared;
    for (let row = 0; row < prepared.rows; row++) {
      if (baseline[row] === AUTOCORRELATION) continue;
      // By the row's place in the dataset, so that the choice is the same in any partition; scattered, so that no
      // baseline is left out.
      const chance = Math.imul(block.firstRow + row, 0x9e3779b1) >>> 8;
      if ((chance & (this.every - 1)) !== 0) continue;
      this.takeSecond(prepared, row);
      const bits = this.placed();
      this.byBaseline.addAt(this.owners.ofRow(prepared, row), bits);
      if ((chance & (this.every * this.channelEvery - 1)) === 0) this.byChannel.addAt(0, bits);
      if ((chance & (this.every * this.spansEvery - 1)) !== 0) continue;
      this.bySpan.addAt(0, bits);
      for (const [k, span] of SPANS.entries()) {
        this.takeFirst(prepared, row, span);
        this.bySpan.addAt(1 + k, bits);
      }
    }
  }

  /** Give the memory back. Nothing can be asked or added after. */
  release(): void {
    for (const bank of [this.byBaseline, this.byChannel, this.bySpan]) bank.release();
    this.arena.release();
  }

  private placed(): number {
    this.bits ??= this.arena.require(4 * this.samples);
    return this.bits;
  }

  /** Second differences of a row, each at its middle channel; of two channels the first difference at the first. */
  private takeSecond(prepared: PreparedBlock, row: number): void {
    if (this.shape.channels === 2) this.takeFirst(prepared, row, 1);
    else this.take(prepared, row, 1, 1);
  }

  private takeFirst(prepared: PreparedBlock, row: number, span: number): void {
    this.take(prepared, row, 0, span);
  }

  private take({ at }: PreparedBlock, row: number, before: number, after: number): void {
    const { subbands, channels, polarizations } = this.shape;
    const first = 4 * row * this.samples;
    differenceKernels.fillDifferences(
      at.real + first,
      at.imag + first,
      at.bits + first,
      subbands,
      channels,
      polarizations,
      before,
      after,
      this.placed(),
    );
  }

  merge(other: this, baselines: Int32Array): void {
    this.byBaseline.merge(other.byBaseline, this.owners.joined(baselines));
    this.byChannel.merge(other.byChannel, [0]);
    this.bySpan.merge(other.bySpan, [0, 1, 2, 3]);
  }

  state(): StateRecord {
    const { byBaseline, byChannel, bySpan } = this;
    return { byBaseline: byBaseline.state(), byChannel: byChannel.state(), bySpan: bySpan.state() };
  }

  restore(from: StateReader, baselines: number): void {
    this.byBaseline.restore(from.child("byBaseline"), this.owners.count(baselines));
    this.byChannel.restore(from.child("byChannel"), 1);
    this.bySpan.restore(from.child("bySpan"), 1 + SPANS.length);
  }

  /** A reader of the quantile of the second differences of baselines; NaN where there are fewer than `fewest`. */
  reader(subband: number, polarization: number, share: number, fewest: number): (baseline: number) => number {
    const sketch = this.baselineSketch(subband, polarization);
    return this.owners.reader((owner) =>
      this.byBaseline.count(owner, sketch) < fewest
        ? Number.NaN
        : this.byBaseline.smoothQuantile(owner, sketch, share),
    );
  }

  private baselineSketch(subband: number, polarization: number): number {
    const { channels, polarizations } = this.shape;
    return this.byBaseline.map.sketch[subband * channels * polarizations + polarization]!;
  }

  /** Median and number of the second differences about a channel, over all baselines. */
  ofChannel(sample: number): { median: number; count: number } {
    const sketch = this.byChannel.map.sketch[sample]!;
    return { median: this.byChannel.smoothQuantile(0, sketch, 0.5), count: this.byChannel.count(0, sketch) };
  }

  /** Medians of the second difference and of first ones over 1, 2 and 3 channels, all baselines together. */
  ofSpans(subband: number): { count: number; medians: readonly number[] } {
    const sketch = Math.min(subband, this.bySpan.map.sketches - 1);
    return {
      count: this.bySpan.count(SPANS.length, sketch),
      medians: [0, 1, 2, 3].map((owner) => this.bySpan.smoothQuantile(owner, sketch, 0.5)),
    };
  }
}

function bySubband({ subbands, channels, polarizations }: Shape): SketchMap {
  const each = channels * polarizations;
  const sketch = Uint32Array.from({ length: subbands * each }, (_, i) => Math.floor(i / each));
  return { sketches: subbands, sketch };
}
