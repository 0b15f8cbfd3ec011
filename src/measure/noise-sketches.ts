/**
 * Noise of one sample from second differences along the channels, V(c-k) - 2 V(c) + V(c+k), which cancel a constant
 * and a slope. Their median is robust against interference in fewer than half of the channels. With k = 2 beside k = 1,
 * spectra smoothed over neighbouring channels are told and corrected for.
 */
import type { Shape } from "../dataset/dataset.ts";
import { MAD_TO_SIGMA, median } from "../util/statistics.ts";
import type { Accumulator } from "./accumulator.ts";
import { addInto } from "./amplitude-sketches.ts";
import type { BaselineIndex } from "./baseline-index.ts";
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

/** Of those rows, the ones whose lag-2 differences are taken: one in this many is plenty for a ratio. */
const LAG2_EVERY = 8;

export class NoiseSketches implements Accumulator {
  private readonly shape: Shape;
  private readonly start: number;
  private readonly index: BaselineIndex;
  private readonly settings: SurveySettings;
  /** (channels) segment of the sub-band that a channel belongs to */
  private readonly segmentOf: Int32Array;
  /** by sketch owner: (buckets x subbands x segments x polarizations) */
  private readonly byOwner = new Map<number, Uint32Array>();
  /** (buckets x subbands x channels x polarizations) over all baselines */
  private readonly byChannel: Uint32Array;
  /** (buckets x 2 lags x subbands x polarizations) */
  private readonly lags: Uint32Array;
  private readonly scratch = new Float32Array(2);
  private readonly scratchBits = new Int32Array(this.scratch.buffer);

  constructor(shape: Shape, settings: SurveySettings, index: BaselineIndex) {
    this.shape = shape;
    this.settings = settings;
    this.index = index;
    this.segmentOf = Int32Array.from({ length: shape.channels }, (_, channel) =>
      Math.floor((channel * settings.noiseSegments) / shape.channels),
    );
    this.start = windowStart(settings.typicalPower);
    const { subbands, channels, polarizations } = shape;
    this.byChannel = new Uint32Array(subbands * channels * polarizations * BUCKETS);
    this.lags = new Uint32Array(2 * subbands * polarizations * BUCKETS);
  }

  private owner(baseline: number): number {
    return this.settings.sketchByBaseline ? baseline : this.index.baselines[baseline]!.antenna1;
  }

  private ofOwner(owner: number): Uint32Array {
    let sketch = this.byOwner.get(owner);
    if (sketch === undefined) {
      const { subbands, polarizations } = this.shape;
      sketch = new Uint32Array(subbands * this.settings.noiseSegments * polarizations * BUCKETS);
      this.byOwner.set(owner, sketch);
    }
    return sketch;
  }

  add(prepared: PreparedBlock): void {
    if (this.shape.channels < 3) return;
    for (let row = 0; row < prepared.rows; row++) {
      const baseline = prepared.baseline[row]!;
      if (baseline === AUTOCORRELATION) continue;
      const drawn = scattered(prepared.block.firstRow + row);
      if (drawn % this.settings.noiseEvery !== 0) continue;
      const toLags = Math.floor(drawn / this.settings.noiseEvery) % LAG2_EVERY === 0;
      this.addRow(prepared, row, this.ofOwner(this.owner(baseline)), 1, toLags);
      if (toLags) this.addRow(prepared, row, null, 2, true);
    }
  }

  /** @param sketch the baseline's; null: this row goes to the sums of lags alone */
  private addRow(
    prepared: PreparedBlock,
    row: number,
    sketch: Uint32Array | null,
    lag: number,
    toLags: boolean,
  ): void {
    const { subbands, channels, polarizations } = this.shape;
    const { real, imag } = prepared.block;
    const { kind } = prepared;
    const { scratch, scratchBits, start, byChannel, lags, segmentOf } = this;
    const segments = this.settings.noiseSegments;
    const ownWidth = subbands * segments * polarizations;
    const channelWidth = subbands * channels * polarizations;
    const lagWidth = 2 * subbands * polarizations;
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
              sketch[bucket * ownWidth + (s * segments + segmentOf[c]!) * polarizations + p]! += 1;
              byChannel[bucket * channelWidth + (s * channels + c) * polarizations + p]! += 1;
            }
            if (toLags) lags[bucket * lagWidth + ((lag - 1) * subbands + s) * polarizations + p]! += 1;
          }
        }
      }
    }
  }

  merge(other: this, baselines: Int32Array): void {
    addInto(this.byChannel, other.byChannel);
    addInto(this.lags, other.lags);
    for (const [owner, counts] of other.byOwner) {
      addInto(this.ofOwner(this.settings.sketchByBaseline ? baselines[owner]! : owner), counts);
    }
  }

  /** sigma over the median second difference of a sub-band and polarization. */
  private factor(subband: number, polarization: number): number {
    const { subbands, polarizations } = this.shape;
    const at = (lag: number) => ((lag - 1) * subbands + subband) * polarizations + polarization;
    const ratio =
      sketchQuantile(this.lags, at(2), this.start, 0.5) / sketchQuantile(this.lags, at(1), this.start, 0.5);
    const smoothed = ratio > SMOOTHED_RATIO[0] && ratio < SMOOTHED_RATIO[1];
    return smoothed
      ? (MAD_TO_SIGMA * ratio) / Math.sqrt(SMOOTHED_LAG2_FACTOR)
      : MAD_TO_SIGMA / Math.sqrt(WHITE_FACTOR);
  }

  /**
   * (subbands x polarizations) rms of the real (or imaginary) part of one sample of a baseline in a channel of typical
   * noise: the median over segments of the sub-band, which a few bad channels do not move. NaN where no three
   * neighbouring channels are usable.
   *
   * @param shape  (subbands x channels x polarizations) noise of a channel over the typical one
   */
  baselineSigma(baseline: number, shape: Float64Array): Float64Array {
    const { subbands, polarizations } = this.shape;
    const segments = this.settings.noiseSegments;
    const sketch = this.byOwner.get(this.owner(baseline));
    const sigma = new Float64Array(subbands * polarizations).fill(Number.NaN);
    if (sketch === undefined) return sigma;
    for (let s = 0; s < subbands; s++) {
      for (let p = 0; p < polarizations; p++) {
        const ofSegments = Float64Array.from({ length: segments }, (_, segment) => {
          const middle = sketchQuantile(
            sketch,
            (s * segments + segment) * polarizations + p,
            this.start,
            0.5,
          );
          return middle / this.segmentShape(shape, s, segment, p);
        });
        sigma[s * polarizations + p] = this.factor(s, p) * median(ofSegments);
      }
    }
    return sigma;
  }

  private segmentShape(shape: Float64Array, subband: number, segment: number, polarization: number): number {
    const { channels, polarizations } = this.shape;
    const of: number[] = [];
    for (let c = 1; c < channels - 1; c++) {
      if (this.segmentOf[c] === segment)
        of.push(shape[(subband * channels + c) * polarizations + polarization]!);
    }
    return median(of);
  }

  /** (subbands x channels x polarizations) the rms over all baselines; NaN in the outermost channels. */
  channelSigma(): Float64Array {
    const { subbands, channels, polarizations } = this.shape;
    const sigma = new Float64Array(subbands * channels * polarizations);
    for (let i = 0; i < sigma.length; i++) {
      const subband = Math.floor(i / (channels * polarizations));
      sigma[i] = this.factor(subband, i % polarizations) * sketchQuantile(this.byChannel, i, this.start, 0.5);
    }
    return sigma;
  }
}

/**
 * A number from a row's place in the dataset, so that a choice of rows is the same in any partition and does not fall in
 * step with the order of the baselines: the finalizer of MurmurHash3 (Appleby 2011).
 */
function scattered(place: number): number {
  let h = (place ^ Math.floor(place / 2 ** 32)) >>> 0;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) >>> 0;
}
