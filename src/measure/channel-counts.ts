/** Samples of each sub-band, channel and polarization by what they are, over all cross-correlations. */
import type { Shape } from "../dataset/dataset.ts";
import type { Accumulator } from "./accumulator.ts";
import { AUTOCORRELATION, type PreparedBlock } from "./prepared.ts";

/** usable, flagged, bad, zero: the kinds of `PreparedBlock` */
const KINDS = 4;

export class ChannelCounts implements Accumulator {
  /** (kinds x subbands x channels x polarizations); doubles hold counts beyond 2^32 exactly */
  readonly counts: Float64Array;
  private readonly samples: number;
  autocorrelationRows = 0;

  constructor(shape: Shape) {
    this.samples = shape.subbands * shape.channels * shape.polarizations;
    this.counts = new Float64Array(KINDS * this.samples);
  }

  add(prepared: PreparedBlock): void {
    const { kind } = prepared;
    const { counts, samples } = this;
    for (let row = 0; row < prepared.rows; row++) {
      if (prepared.baseline[row] === AUTOCORRELATION) {
        this.autocorrelationRows += 1;
        continue;
      }
      const first = row * samples;
      for (let i = 0; i < samples; i++) counts[kind[first + i]! * samples + i]! += 1;
    }
  }

  merge(other: this): void {
    for (let i = 0; i < this.counts.length; i++) this.counts[i]! += other.counts[i]!;
    this.autocorrelationRows += other.autocorrelationRows;
  }

  /** @param kind USABLE, FLAGGED, BAD or ZERO  @param sample (subband x channels + channel) x polarizations + polarization */
  of(kind: number, sample: number): number {
    return this.counts[kind * this.samples + sample]!;
  }
}
