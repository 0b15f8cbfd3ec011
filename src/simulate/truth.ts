/** What was done to a simulated dataset: fault by fault, and sample by sample. */
import type { Dataset, SampleBlock } from "../dataset/dataset.ts";
import type { Selection } from "../dataset/selection.ts";
import type { CompiledFault, Spoils } from "./faults/effect.ts";
import type { Observation } from "./observation.ts";
import type { RowPlace, Schedule } from "./schedule.ts";

/** One fault as it is. */
export interface TrueFault {
  readonly kind: string;
  /** the smallest cause that explains it; "tables": what is written about the rows, or which rows there are */
  readonly cause: CompiledFault["cause"];
  /** the smallest selection that holds every sample touched; not every sample of it need be */
  readonly selection: Selection;
  readonly size: number;
  readonly unit: string;
  /** "flags" spoils nothing: such samples are only held as flagged */
  readonly spoils: Spoils;
}

export class Truth {
  readonly faults: readonly TrueFault[];
  readonly observation: Observation;
  readonly rows: number;
  private readonly compiled: readonly CompiledFault[];
  private readonly dataset: Dataset;
  private readonly schedule: Schedule;

  constructor(
    observation: Observation,
    compiled: readonly CompiledFault[],
    schedule: Schedule,
    dataset: Dataset,
  ) {
    this.observation = observation;
    this.compiled = compiled;
    this.dataset = dataset;
    this.schedule = schedule;
    this.rows = schedule.rows;
    this.faults = compiled.map(({ kind, cause, selection, size, unit, spoils }) => ({
      kind,
      cause,
      selection,
      size,
      unit,
      spoils,
    }));
  }

  /**
   * 1 for each sample of a block that a fault touched, (rows x subbands x channels x polarizations).
   *
   * @param block of the dataset, or of the file written from it: rows are known by their number
   * @param fault index into `faults`; without it, every fault that spoils values
   */
  mask(block: Pick<SampleBlock, "firstRow" | "rows">, fault?: number): Uint8Array {
    const { rowSamples } = this.observation;
    const out = new Uint8Array(block.rows * rowSamples);
    const chosen =
      fault === undefined
        ? this.compiled.filter(({ spoils }) => spoils === "values")
        : [this.compiled[fault]!];
    const place: RowPlace = { time: 0, baseline: 0, copy: false };
    for (let row = 0; row < block.rows; row++) {
      this.schedule.locate(block.firstRow + row, place);
      for (const { effect, kind } of chosen) {
        if (effect?.covers(place.time, place.baseline)) {
          effect.mark(place.time, place.baseline, out, row * rowSamples);
        } else if (kind === "duplicate-rows" && place.copy) {
          out.fill(1, row * rowSamples, (row + 1) * rowSamples);
        }
      }
    }
    return out;
  }

  /** Samples that each fault touched, over the whole dataset. */
  async counts(): Promise<number[]> {
    const counts = this.faults.map(() => 0);
    for await (const block of this.dataset.blocks({ want: "rows", blockRows: 1024 })) {
      this.faults.forEach((_, fault) => {
        counts[fault]! += this.mask(block, fault).reduce((sum, mark) => sum + mark, 0);
      });
    }
    return counts;
  }
}
