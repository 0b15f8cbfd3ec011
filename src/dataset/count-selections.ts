/** What selections hold: their samples and weights, counted in one pass over the weights. */
import { moduleBeside, shareOut, type Workers } from "../util/workers.ts";
import type { CountTask } from "./count-task.ts";
import type { Dataset, SampleBlock } from "./dataset.ts";
import { type Selection, selectionAlone } from "./selection.ts";
import { compileSelections, type SelectionMatcher } from "./selection-matcher.ts";

/** What a selection holds. */
export interface SelectionCount {
  /** samples, autocorrelations included */
  readonly samples: number;
  /** samples with a finite weight above zero */
  readonly unflagged: number;
  /** of those, the ones that no earlier selection of the list takes */
  readonly fresh: number;
  /** sum of the positive finite weights of cross-correlations */
  readonly weight: number;
}

export interface SelectionCounts {
  /** in the order of the selections */
  readonly each: readonly SelectionCount[];
  /** samples that any of them takes */
  readonly union: SelectionCount;
  /** the whole dataset */
  readonly total: SelectionCount;
}

/**
 * Count, in one pass over the weights, what each selection holds. Weight sums are of row sums rounded to a fixed
 * power of two, so they do not depend on how the rows are read.
 *
 * @param workers threads that share the rows; none: this one reads them all. The result is the same.
 */
export async function countSelections(
  dataset: Dataset,
  selections: readonly Selection[],
  workers?: Workers,
): Promise<SelectionCounts> {
  const quantum = await weightQuantum(dataset);
  const ranges = shareOut(dataset.rows, workers?.jobs ?? 1);
  if (workers === undefined || dataset.recipe === undefined || ranges.length < 2) {
    return countsOf(await tallyRows(dataset, selections, quantum, [0, dataset.rows]));
  }
  const { recipe } = dataset;
  const plain = selections.map(selectionAlone);
  const tallies = await workers.run<CountTask, TallySums>(
    moduleBeside("./count-task", import.meta.url),
    ranges.map((rows) => ({ recipe, selections: plain, quantum, rows })),
  );
  return countsOf(tallies.reduce(addTallies));
}

/** Sums of a tally: by selection, then the union, then the whole dataset. */
export interface TallySums {
  readonly samples: Float64Array;
  readonly unflagged: Float64Array;
  readonly fresh: Float64Array;
  readonly weight: Float64Array;
}

/** @param quantum from `weightQuantum` of the whole dataset */
export async function tallyRows(
  dataset: Dataset,
  selections: readonly Selection[],
  quantum: number,
  rows: readonly [number, number],
  onProgress?: (rowsDone: number) => void,
): Promise<TallySums> {
  const matcher = compileSelections(dataset, selections);
  const tally = new Tally(selections.length, rowSamplesOf(dataset), quantum);
  let done = 0;
  for await (const block of dataset.blocks({ want: "weights", rows })) {
    for (let row = 0; row < block.rows; row++) tally.addRow(matcher, block, row);
    done += block.rows;
    onProgress?.(done);
  }
  const { samples, unflagged, fresh, weight } = tally;
  return { samples, unflagged, fresh, weight };
}

/** Whole numbers and multiples of one power of two: exact in any order. */
function addTallies(a: TallySums, b: TallySums): TallySums {
  const sum = (x: Float64Array, y: Float64Array) => x.map((value, i) => value + y[i]!);
  return {
    samples: sum(a.samples, b.samples),
    unflagged: sum(a.unflagged, b.unflagged),
    fresh: sum(a.fresh, b.fresh),
    weight: sum(a.weight, b.weight),
  };
}

function countsOf(sums: TallySums): SelectionCounts {
  const at = (slot: number): SelectionCount => ({
    samples: sums.samples[slot]!,
    unflagged: sums.unflagged[slot]!,
    fresh: sums.fresh[slot]!,
    weight: sums.weight[slot]!,
  });
  const selections = sums.samples.length - 2;
  return {
    each: Array.from({ length: selections }, (_, slot) => at(slot)),
    union: at(selections),
    total: at(selections + 1),
  };
}

class Tally {
  private readonly rowSamples: number;
  private readonly quantum: number;
  /** by selection, then the union, then the whole dataset */
  readonly samples: Float64Array;
  readonly unflagged: Float64Array;
  readonly fresh: Float64Array;
  readonly weight: Float64Array;
  /** number of the row that last took this sample offset */
  private readonly taken: Float64Array;
  private rows = 0;

  constructor(selections: number, rowSamples: number, quantum: number) {
    this.rowSamples = rowSamples;
    this.quantum = quantum;
    this.samples = new Float64Array(selections + 2);
    this.unflagged = new Float64Array(selections + 2);
    this.fresh = new Float64Array(selections + 2);
    this.weight = new Float64Array(selections + 2);
    this.taken = new Float64Array(rowSamples);
  }

  addRow(matcher: SelectionMatcher, block: SampleBlock, row: number): void {
    this.rows += 1;
    const cross = block.antenna1[row] !== block.antenna2[row];
    const base = row * this.rowSamples;
    const union = matcher.count;
    this.addWhole(block.weight, base, cross, union + 1);
    const count = matcher.matchRow(block, row);
    let unionWeight = 0;
    for (let i = 0; i < count; i++) {
      const s = matcher.matched[i]!;
      unionWeight += this.addSelection(block.weight, base, cross, s, union, matcher.runs[s]!);
    }
    if (cross) this.weight[union]! += this.rounded(unionWeight);
  }

  private addWhole(weight: Float32Array, base: number, cross: boolean, slot: number): void {
    const end = base + this.rowSamples;
    let unflagged = 0;
    let sum = 0;
    for (let at = base; at < end; at++) {
      const value = weight[at]!;
      if (!(value > 0 && value < Number.POSITIVE_INFINITY)) continue;
      unflagged += 1;
      sum += value;
    }
    this.samples[slot]! += this.rowSamples;
    this.unflagged[slot]! += unflagged;
    this.fresh[slot]! += unflagged;
    if (cross) this.weight[slot]! += this.rounded(sum);
  }

  /** Count one selection's samples of a row; the weight of those that no earlier selection took. */
  private addSelection(
    weight: Float32Array,
    base: number,
    cross: boolean,
    slot: number,
    union: number,
    bounds: Int32Array,
  ): number {
    const { taken, rows } = this;
    let samples = 0;
    let unflagged = 0;
    let untaken = 0;
    let fresh = 0;
    let sum = 0;
    let freshSum = 0;
    for (let b = 0; b < bounds.length; b += 2) {
      const end = bounds[b + 1]!;
      for (let offset = bounds[b]!; offset < end; offset++) {
        const value = weight[base + offset]!;
        const usable = value > 0 && value < Number.POSITIVE_INFINITY;
        samples += 1;
        if (usable) {
          unflagged += 1;
          sum += value;
        }
        if (taken[offset] === rows) continue;
        taken[offset] = rows;
        untaken += 1;
        if (usable) {
          fresh += 1;
          freshSum += value;
        }
      }
    }
    this.samples[slot]! += samples;
    this.unflagged[slot]! += unflagged;
    this.fresh[slot]! += fresh;
    if (cross) this.weight[slot]! += this.rounded(sum);
    this.samples[union]! += untaken;
    this.unflagged[union]! += fresh;
    this.fresh[union]! += fresh;
    return freshSum;
  }

  private rounded(sum: number): number {
    return Math.round(sum / this.quantum) * this.quantum;
  }
}

/**
 * The power of two that row sums are rounded to: 2^-16 of the first usable weight, so that 2^37 such weights add up
 * exactly in any order. 1 when nothing is usable.
 */
async function weightQuantum(dataset: Dataset): Promise<number> {
  const rowSamples = rowSamplesOf(dataset);
  for await (const block of dataset.blocks({ want: "weights" })) {
    const end = block.rows * rowSamples;
    for (let at = 0; at < end; at++) {
      const value = block.weight[at]!;
      if (value > 0 && value < Number.POSITIVE_INFINITY) return 2 ** (Math.floor(Math.log2(value)) - 16);
    }
  }
  return 1;
}

function rowSamplesOf(dataset: Dataset): number {
  const { subbands, channels, polarizations } = dataset.shape;
  return subbands * channels * polarizations;
}
