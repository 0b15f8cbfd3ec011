/**
 * The state of a survey over some of the rows. Parts of any sharing-out of the rows, joined in any order, come to the
 * same survey to the last bit.
 */
import type { Dataset, SampleBlock } from "../dataset/dataset.ts";
import type { Accumulator } from "./accumulator.ts";
import { AmplitudeSketches } from "./amplitude-sketches.ts";
import { BaselineIndex } from "./baseline-index.ts";
import { BaselineTally } from "./baseline-tally.ts";
import { BinnedRows } from "./binned-rows.ts";
import { ChannelCounts } from "./channel-counts.ts";
import { MOST_BASELINES } from "./even-choice.ts";
import { KeptRows } from "./kept-rows.ts";
import { NoiseSketches } from "./noise-sketches.ts";
import { OtherBaselines } from "./other-baselines.ts";
import { PreparedBlock } from "./prepared.ts";
import { Screen } from "./screen/screen.ts";
import { type SurveySettings, settleSurvey } from "./settings.ts";
import { SketchOwners } from "./sketch-owners.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";
import { TimeOrder } from "./time-order.ts";
import { CELL_BYTES, PRODUCT_BYTES } from "./track-columns.ts";
import type { TrackKeeper } from "./track-keeper.ts";

/** Of the memory for sketches, the share of those of the amplitudes. */
const AMPLITUDE_SHARE = 0.75;
/** However little the memory holds, so many baselines are looked at one by one: of thousands of antennas some ten each. */
const FEWEST_BASELINES = 1 << 14;

/** What is gathered of the rows, by kind. The survey adds and merges all of them alike. */
export interface Gathered {
  readonly amplitudes: AmplitudeSketches;
  readonly noise: NoiseSketches;
  readonly channels: ChannelCounts;
  readonly baselines: BaselineTally;
  readonly others: OtherBaselines;
  readonly order: TimeOrder;
  readonly tracks: TrackKeeper;
  readonly screen: Screen;
}

/** Whether every row of the baselines looked at one by one has a cell of its own, rather than a share in a time bin. */
function keepsRows({ shape, rows }: Dataset, { thins, baselines, trackBytes }: SurveySettings): boolean {
  const rowBytes = CELL_BYTES + PRODUCT_BYTES * shape.subbands * shape.polarizations;
  const least = thins ? Math.min(1, FEWEST_BASELINES / baselines) : 1;
  return least * rows * rowBytes <= trackBytes;
}

function gatherers(dataset: Dataset, settings: SurveySettings, index: BaselineIndex): Gathered {
  const { shape } = dataset;
  const { sketchBytes, trackBytes } = settings;
  const owners = new SketchOwners(settings.sharedSketches, index);
  const noiseOwners = new SketchOwners(settings.sharedNoise, index);
  return {
    amplitudes: new AmplitudeSketches(shape, AMPLITUDE_SHARE * sketchBytes, settings, owners),
    noise: new NoiseSketches(shape, (1 - AMPLITUDE_SHARE) * sketchBytes, settings, noiseOwners),
    channels: new ChannelCounts(shape),
    baselines: new BaselineTally(shape),
    others: new OtherBaselines(shape),
    order: new TimeOrder(),
    tracks: keepsRows(dataset, settings) ? new KeptRows(shape) : new BinnedRows(shape, trackBytes),
    screen: new Screen(dataset),
  };
}

export class SurveyPart {
  readonly dataset: Dataset;
  readonly index = new BaselineIndex();
  readonly gathered: Gathered;
  private readonly accumulators: readonly Accumulator[];
  private readonly prepared: PreparedBlock;
  private readonly settings: SurveySettings;
  /** The number of baselines settles how many are chosen, rather than the sizes of the dataset beforehand. */
  private readonly thinsAsNeeded: boolean;

  /** @param memory bytes that the state may take; parts to be joined need the same */
  constructor(dataset: Dataset, memory?: number) {
    this.dataset = dataset;
    this.prepared = new PreparedBlock(dataset.shape);
    const settings = settleSurvey(dataset, memory);
    this.settings = settings;
    this.thinsAsNeeded = settings.thins && keepsRows(dataset, settings);
    if (settings.thins && !this.thinsAsNeeded) {
      this.index.halvings = Math.ceil(Math.log2(settings.baselines / FEWEST_BASELINES));
    }
    this.gathered = gatherers(dataset, settings, this.index);
    this.accumulators = Object.values(this.gathered);
  }

  /** Of all that it has gathered, as plain data. It is not to be used after. */
  state(): StateRecord {
    const antennas = this.index.baselines.flatMap(({ antenna1, antenna2 }) => [antenna1, antenna2]);
    const entries = Object.entries(this.gathered as unknown as Record<string, Accumulator>);
    const state = {
      antennas: Int32Array.from(antennas),
      halvings: this.index.halvings,
      others: this.index.others.state(),
      gathered: Object.fromEntries(entries.map(([name, accumulator]) => [name, accumulator.state()])),
    };
    this.release();
    return state;
  }

  /** Give back the kernels' memory, which no collector takes in time. It is not to be used after. */
  release(): void {
    this.prepared.release();
    for (const accumulator of this.accumulators) accumulator.release?.();
  }

  /** The part that a state was taken of. @throws InputError where it can not be one of such a part */
  static from(state: StateReader, dataset: Dataset, memory?: number): SurveyPart {
    const part = new SurveyPart(dataset, memory);
    const antennas = state.array(Int32Array, "antennas");
    part.index.halvings = state.integer("halvings", 0, 32);
    part.index.others.restore(state.child("others"));
    for (let i = 0; 2 * i + 1 < antennas.length; i++) {
      const [antenna1, antenna2] = [antennas[2 * i]!, antennas[2 * i + 1]!];
      if (antenna1 < antenna2 && part.index.indexOf(antenna1, antenna2) === i) continue;
      throw state.error(`${antenna1}-${antenna2} is no baseline, or stands twice`, "antennas");
    }
    const gathered = state.child("gathered");
    const entries = Object.entries(part.gathered as unknown as Record<string, Accumulator>);
    for (const [name, accumulator] of entries) {
      accumulator.restore(gathered.child(name), part.index.baselines.length, dataset.setups.length);
    }
    return part;
  }

  add(block: SampleBlock): void {
    this.prepared.take(block, this.index);
    for (const accumulator of this.accumulators) accumulator.add(this.prepared);
    this.thinAsNeeded();
  }

  /** Room may be made at once for the rows about to be added. */
  expect(rows: number): void {
    if (!this.thinsAsNeeded) this.gathered.tracks.expect?.(rows);
  }

  /**
   * Choose ever fewer baselines until they fit. The first choice that fits is the same for the rows in any order, since
   * more rows never make fewer baselines and cells of it.
   */
  private thinAsNeeded(): void {
    if (!this.thinsAsNeeded) return;
    const { index, gathered, settings } = this;
    const isTooMuch = () =>
      index.baselines.length > MOST_BASELINES ||
      ((gathered.tracks.bytes ?? 0) > settings.trackBytes && index.baselines.length > FEWEST_BASELINES);
    while (isTooMuch()) this.halve();
  }

  private halve(): void {
    const before = [...this.index.baselines];
    const baselines = this.index.halve();
    for (const accumulator of this.accumulators) accumulator.thin?.(baselines, before, this.gathered.others);
  }

  /** Take over a part of other rows of the same dataset, which is not to be used any more. */
  merge(other: SurveyPart): void {
    while (this.index.halvings < other.index.halvings) this.halve();
    while (other.index.halvings < this.index.halvings) other.halve();
    this.index.others.merge(other.index.others);
    const baselines = Int32Array.from(other.index.baselines, ({ antenna1, antenna2 }) =>
      this.index.indexOf(antenna1, antenna2),
    );
    for (const [i, accumulator] of this.accumulators.entries()) {
      accumulator.merge(other.accumulators[i]!, baselines);
    }
    other.release();
    this.thinAsNeeded();
  }
}
