/**
 * Noise of one sample from second differences along the channels, V(c-k) - 2 V(c) + V(c+k), which cancel a constant
 * and a slope. Their median is robust against interference in fewer than half of the channels. With k = 2 beside k = 1,
 * spectra smoothed over neighbouring channels are told and corrected for.
 */
import type { Shape } from "../dataset/dataset.ts";
import { MAD_TO_SIGMA } from "../util/statistics.ts";
import type { Accumulator } from "./accumulator.ts";
import { addInto } from "./amplitude-sketches.ts";
import { BUCKET_SHIFT, BUCKETS, sketchQuantile, windowStart } from "./buckets.ts";
import { AUTOCORRELATION, type PreparedBlock, USABLE } from "./prepared.ts";
import type { SurveySettings } from "./settings.ts";

/** Variance of a second difference over that of one sample: white noise, 1 + 4 + 1. */
const WHITE_FACTOR = 6;
/**
 * The same for noise smoothed by (1/4, 1/2, 1/4), whose correlations are 2/3 and 1/6 at lags 1 and 2: at lag 1
 * 6 - 8 (2/3) + 2 (1/6) = 1, at lag 2 6 - 8 (1/6) = 14/3.
 */
const SMOOTHED_LAG2_FACTOR = 14 / 3;
/** Ratio of lag-2 to lag-1 rms: 1 for white noise, sqrt(14/3) = 2.16 when smoothed. */
const SMOOTHED_RATIO: readonly [number, number] = [1.9, 2.5];

/** Rows whose lag-2 differences are taken: one in this many is plenty for a ratio. */
const LAG2_EVERY = 8;

export class NoiseSketches implements Accumulator {
  private readonly shape: Shape;
  private readonly start: number;
  private readonly byBaseline: Uint32Array[] = [];
  /** (subbands x channels x polarizations x buckets) over all baselines */
  private readonly byChannel: Uint32Array;
  /** (2 lags x subbands x polarizations x buckets) */
  private readonly lags: Uint32Array;
  private readonly scratch = new Float32Array(2);
  private readonly scratchBits = new Int32Array(this.scratch.buffer);

  constructor(shape: Shape, settings: SurveySettings) {
    this.shape = shape;
    this.start = windowStart(settings.typicalPower);
    const { subbands, channels, polarizations } = shape;
    this.byChannel = new Uint32Array(subbands * channels * polarizations * BUCKETS);
    this.lags = new Uint32Array(2 * subbands * polarizations * BUCKETS);
  }

  private ofBaseline(baseline: number): Uint32Array {
    let sketch = this.byBaseline[baseline];
    if (sketch === undefined) {
      sketch = new Uint32Array(this.shape.subbands * this.shape.polarizations * BUCKETS);
      this.byBaseline[baseline] = sketch;
    }
    return sketch;
  }

  add(prepared: PreparedBlock): void {
    if (this.shape.channels < 3) return;
    for (let row = 0; row < prepared.rows; row++) {
      const baseline = prepared.baseline[row]!;
      if (baseline === AUTOCORRELATION) continue;
      this.addRow(prepared, row, this.ofBaseline(baseline), 1);
      // By the row's place in the dataset, so that the choice is the same in any partition.
      if ((prepared.block.firstRow + row) % LAG2_EVERY === 0) {
        this.addRow(prepared, row, null, 2);
      }
    }
  }

  /** @param sketch the baseline's; null: this row goes to the sums of lags alone */
  private addRow(prepared: PreparedBlock, row: number, sketch: Uint32Array | null, lag: number): void {
    const { subbands, channels, polarizations } = this.shape;
    const { real, imag } = prepared.block;
    const { kind } = prepared;
    const { scratch, scratchBits, start, byChannel, lags } = this;
    const toLags = sketch === null || (prepared.block.firstRow + row) % LAG2_EVERY === 0;
    const step = lag * polarizations;
    for (let s = 0; s < subbands; s++) {
      const subband = row * prepared.rowSamples + s * channels * polarizations;
      for (let c = lag; c < channels - lag; c++) {
        for (let p = 0; p < polarizations; p++) {
          const i = subband + c * polarizations + p;
          if (kind[i]! + kind[i - step]! + kind[i + step]! !== 3 * USABLE) continue;
          const re = real[i - step]! - 2 * real[i]! + real[i + step]!;
          const im = imag[i - step]! - 2 * imag[i]! + imag[i + step]!;
          scratch[0] = re * re;
          scratch[1] = im * im;
          for (let part = 0; part < 2; part++) {
            let bucket = (scratchBits[part]! >> BUCKET_SHIFT) - start;
            if (bucket < 0) bucket = 0;
            else if (bucket >= BUCKETS) bucket = BUCKETS - 1;
            if (sketch !== null) {
              sketch[(s * polarizations + p) * BUCKETS + bucket]! += 1;
              byChannel[((s * channels + c) * polarizations + p) * BUCKETS + bucket]! += 1;
            }
            if (toLags) lags[(((lag - 1) * subbands + s) * polarizations + p) * BUCKETS + bucket]! += 1;
          }
        }
      }
    }
  }

  merge(other: this, baselines: Int32Array): void {
    addInto(this.byChannel, other.byChannel);
    addInto(this.lags, other.lags);
    for (const [baseline, counts] of other.byBaseline.entries()) {
      if (counts !== undefined) addInto(this.ofBaseline(baselines[baseline]!), counts);
    }
  }

  /** sigma over the median second difference of a sub-band and polarization. */
  private factor(subband: number, polarization: number): number {
    const { subbands, polarizations } = this.shape;
    const at = (lag: number) => (((lag - 1) * subbands + subband) * polarizations + polarization) * BUCKETS;
    const ratio =
      sketchQuantile(this.lags, at(2), this.start, 0.5) / sketchQuantile(this.lags, at(1), this.start, 0.5);
    const smoothed = ratio > SMOOTHED_RATIO[0] && ratio < SMOOTHED_RATIO[1];
    return smoothed
      ? (MAD_TO_SIGMA * ratio) / Math.sqrt(SMOOTHED_LAG2_FACTOR)
      : MAD_TO_SIGMA / Math.sqrt(WHITE_FACTOR);
  }

  /**
   * (subbands x polarizations) rms of the real (or imaginary) part of one sample of a baseline; NaN where no three
   * neighbouring channels are usable.
   */
  baselineSigma(baseline: number): Float64Array {
    const { subbands, polarizations } = this.shape;
    const sketch = this.byBaseline[baseline];
    return Float64Array.from({ length: subbands * polarizations }, (_, i) =>
      sketch === undefined
        ? Number.NaN
        : this.factor(Math.floor(i / polarizations), i % polarizations) *
          sketchQuantile(sketch, i * BUCKETS, this.start, 0.5),
    );
  }

  /** (subbands x channels x polarizations) the same over all baselines; NaN in the outermost channels. */
  channelSigma(): Float64Array {
    const { subbands, channels, polarizations } = this.shape;
    const sigma = new Float64Array(subbands * channels * polarizations);
    for (let i = 0; i < sigma.length; i++) {
      const subband = Math.floor(i / (channels * polarizations));
      sigma[i] =
        this.factor(subband, i % polarizations) *
        sketchQuantile(this.byChannel, i * BUCKETS, this.start, 0.5);
    }
    return sigma;
  }
}
