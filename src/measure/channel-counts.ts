/** Samples of each sub-band, channel and polarization by what they are, over all cross-correlations. */
import type { Shape } from "../dataset/dataset.ts";
import type { Accumulator } from "./accumulator.ts";
import { AUTOCORRELATION, BAD, FLAGGED, type PreparedBlock, USABLE, ZERO } from "./prepared.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** Kinds a sample may be, USABLE among them. */
const KINDS = 1 + Math.max(FLAGGED, BAD, ZERO);

export class ChannelCounts implements Accumulator {
  private readonly samples: number;
  /** (kinds x samples of a row), none of them usable */
  private readonly odd: Float64Array;
  private rows = 0;

  constructor(shape: Shape) {
    this.samples = shape.subbands * shape.channels * shape.polarizations;
    this.odd = new Float64Array(KINDS * this.samples);
  }

  add(prepared: PreparedBlock): void {
    const { baseline, bits, whole } = prepared;
    const { odd, samples } = this;
    for (let row = 0; row < prepared.rows; row++) {
      if (baseline[row] === AUTOCORRELATION) continue;
      this.rows += 1;
      if (whole[row] === 1) continue;
      const first = row * samples;
      for (let i = 0; i < samples; i++) {
        const kind = bits[first + i]!;
        if (kind < 0) odd[-kind * samples + i]! += 1;
      }
    }
  }

  merge(other: this): void {
    for (let i = 0; i < this.odd.length; i++) this.odd[i]! += other.odd[i]!;
    this.rows += other.rows;
  }

  state(): StateRecord {
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
    const odd = (what: number) => this.odd[what * this.samples + sample]!;
    return kind === USABLE ? this.rows - odd(FLAGGED) - odd(BAD) - odd(ZERO) : odd(kind);
  }
}
