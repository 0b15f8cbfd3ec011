/** Amplitude sketches by baseline, sub-band, channel group and polarization. */

import type { Shape } from "../dataset/dataset.ts";
import type { Accumulator } from "./accumulator.ts";
import type { BaselineIndex } from "./baseline-index.ts";
import { BUCKET_SHIFT, BUCKETS, sketchQuantile, windowStart } from "./buckets.ts";
import { AUTOCORRELATION, type PreparedBlock, USABLE } from "./prepared.ts";
import type { SurveySettings } from "./settings.ts";

export class AmplitudeSketches implements Accumulator {
  private readonly shape: Shape;
  private readonly settings: SurveySettings;
  private readonly index: BaselineIndex;
  private readonly start: number;
  /** (channels) group that a channel belongs to */
  private readonly groupOf: Int32Array;
  /** by sketch owner: (buckets x subbands x groups x polarizations) */
  private readonly sketches = new Map<number, Uint32Array>();
  /** by baseline: (subbands x channels x polarizations) usable samples */
  private readonly counts: Uint32Array[] = [];

  constructor(shape: Shape, settings: SurveySettings, index: BaselineIndex) {
    this.shape = shape;
    this.settings = settings;
    this.index = index;
    this.start = windowStart(settings.typicalPower);
    this.groupOf = Int32Array.from({ length: shape.channels }, (_, channel) =>
      Math.floor((channel * settings.channelGroups) / shape.channels),
    );
  }

  private owner(baseline: number): number {
    return this.settings.sketchByBaseline ? baseline : this.index.baselines[baseline]!.antenna1;
  }

  private sketchOf(owner: number): Uint32Array {
    let sketch = this.sketches.get(owner);
    if (sketch === undefined) {
      const { subbands, polarizations } = this.shape;
      sketch = new Uint32Array(subbands * this.settings.channelGroups * polarizations * BUCKETS);
      this.sketches.set(owner, sketch);
    }
    return sketch;
  }

  private countsOf(baseline: number): Uint32Array {
    let counts = this.counts[baseline];
    if (counts === undefined) {
      const { subbands, channels, polarizations } = this.shape;
      counts = new Uint32Array(subbands * channels * polarizations);
      this.counts[baseline] = counts;
    }
    return counts;
  }

  add(prepared: PreparedBlock): void {
    const { subbands, channels, polarizations } = this.shape;
    const { kind, powerBits, rowSamples } = prepared;
    const { start, groupOf } = this;
    const groups = this.settings.channelGroups;
    const width = subbands * groups * polarizations;
    for (let row = 0; row < prepared.rows; row++) {
      const baseline = prepared.baseline[row]!;
      if (baseline === AUTOCORRELATION) continue;
      const sketches = this.sketchOf(this.owner(baseline));
      const counts = this.countsOf(baseline);
      let i = row * rowSamples;
      let at = 0;
      for (let s = 0; s < subbands; s++) {
        for (let c = 0; c < channels; c++) {
          let sketch = (s * groups + groupOf[c]!) * polarizations;
          for (let p = 0; p < polarizations; p++, i++, at++, sketch++) {
            if (kind[i] !== USABLE) continue;
            let bucket = (powerBits[i]! >> BUCKET_SHIFT) - start;
            if (bucket < 0) bucket = 0;
            else if (bucket >= BUCKETS) bucket = BUCKETS - 1;
            sketches[bucket * width + sketch]! += 1;
            counts[at]! += 1;
          }
        }
      }
    }
  }

  merge(other: this, baselines: Int32Array): void {
    for (const [owner, counts] of other.sketches) {
      const ours = this.settings.sketchByBaseline ? baselines[owner]! : owner;
      addInto(this.sketchOf(ours), counts);
    }
    for (const [baseline, counts] of other.counts.entries()) {
      if (counts !== undefined) addInto(this.countsOf(baselines[baseline]!), counts);
    }
  }

  /** @param median out (subbands x channels x polarizations) amplitude, NaN where nothing is usable */
  fillMedians(baseline: number, median: Float32Array): void {
    const { subbands, channels, polarizations } = this.shape;
    const sketch = this.sketches.get(this.owner(baseline));
    median.fill(Number.NaN);
    if (sketch === undefined) return;
    const groups = this.settings.channelGroups;
    const ofSketch = Float32Array.from({ length: subbands * groups * polarizations }, (_, i) =>
      sketchQuantile(sketch, i, this.start, 0.5),
    );
    let at = 0;
    for (let s = 0; s < subbands; s++) {
      for (let c = 0; c < channels; c++) {
        for (let p = 0; p < polarizations; p++, at++) {
          median[at] = ofSketch[(s * groups + this.groupOf[c]!) * polarizations + p]!;
        }
      }
    }
  }

  /** (subbands x channels x polarizations) usable samples of a baseline */
  usable(baseline: number): Uint32Array {
    return this.countsOf(baseline);
  }
}

export function addInto(ours: Uint32Array, theirs: Uint32Array): void {
  for (let i = 0; i < ours.length; i++) ours[i]! += theirs[i]!;
}
