/**
 * The state of a survey over some of the rows. Parts of any sharing-out of the rows, joined in any order, come to the
 * same survey to the last bit.
 */
import type { Dataset, SampleBlock } from "../dataset/dataset.ts";
import type { Accumulator } from "./accumulator.ts";
import { AmplitudeSketches } from "./amplitude-sketches.ts";
import { BaselineIndex } from "./baseline-index.ts";
import { ChannelCounts } from "./channel-counts.ts";
import { NoiseSketches } from "./noise-sketches.ts";
import { PreparedBlock } from "./prepared.ts";
import type { SurveySettings } from "./settings.ts";
import { TimeOrder } from "./time-order.ts";
import { TrackCells } from "./track-cells.ts";

export class SurveyPart {
  readonly dataset: Dataset;
  readonly settings: SurveySettings;
  readonly index = new BaselineIndex();
  readonly amplitudes: AmplitudeSketches;
  readonly noise: NoiseSketches;
  readonly channels: ChannelCounts;
  readonly order = new TimeOrder();
  readonly tracks: TrackCells;
  private readonly prepared: PreparedBlock;

  constructor(dataset: Dataset, settings: SurveySettings) {
    const { shape } = dataset;
    this.dataset = dataset;
    this.settings = settings;
    this.prepared = new PreparedBlock(shape);
    this.amplitudes = new AmplitudeSketches(shape, settings, this.index);
    this.noise = new NoiseSketches(shape, settings, this.index);
    this.channels = new ChannelCounts(shape);
    this.tracks = new TrackCells(shape, settings);
  }

  private get accumulators(): readonly Accumulator[] {
    return [this.amplitudes, this.noise, this.channels, this.order, this.tracks];
  }

  add(block: SampleBlock): void {
    this.prepared.take(block, this.index);
    for (const accumulator of this.accumulators) accumulator.add(this.prepared);
  }

  merge(other: SurveyPart): void {
    const baselines = Int32Array.from(other.index.baselines, ({ antenna1, antenna2 }) =>
      this.index.indexOf(antenna1, antenna2),
    );
    const theirs = other.accumulators;
    for (const [i, accumulator] of this.accumulators.entries()) accumulator.merge(theirs[i]!, baselines);
  }
}
