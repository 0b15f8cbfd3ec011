/**
 * A dataset with selections flagged, without touching its file: the same blocks, the selected weights turned
 * negative. And what selections hold: their samples and weights, counted in one pass over the weights.
 */
import type { BlockRequest, Dataset, SampleBlock } from "./dataset.ts";
import type { Selection } from "./selection.ts";
import { compileSelections, type SelectionMatcher } from "./selection-matcher.ts";

export { compileSelections, type SelectionMatcher } from "./selection-matcher.ts";

/**
 * The dataset as it would be with the selections flagged: weight = -|weight| on every selected sample. A weight of
 * zero stays zero and one that is not finite stays as it is.
 */
export function flaggedView(dataset: Dataset, selections: readonly Selection[]): Dataset {
  if (selections.length === 0) return dataset;
  const { recipe, ...rest } = dataset;
  return {
    ...rest,
    ...(recipe === undefined
      ? {}
      : { recipe: { kind: "flagged", of: recipe, selections: selections.map(selectionAlone) } }),
    blocks: (request) => flaggedBlocks(dataset, selections, request),
  };
}

/** Without what a flag carries besides: a recipe is sent to other threads. */
function selectionAlone(selection: Selection): Selection {
  const { antennas, baselines, time, subbands, channels, polarizations, fields } = selection;
  return { antennas, baselines, time, subbands, channels, polarizations, fields };
}

async function* flaggedBlocks(
  dataset: Dataset,
  selections: readonly Selection[],
  request: BlockRequest,
): AsyncIterable<SampleBlock> {
  const matcher = compileSelections(dataset, selections);
  const rowSamples = rowSamplesOf(dataset);
  for await (const block of dataset.blocks(request)) {
    if (request.want !== "rows") flagBlock(matcher, block, rowSamples);
    yield block;
  }
}

/** Flag in place the samples of a block that any selection takes. */
function flagBlock(matcher: SelectionMatcher, block: SampleBlock, rowSamples: number): void {
  const { weight } = block;
  const { matched, runs } = matcher;
  for (let row = 0; row < block.rows; row++) {
    const count = matcher.matchRow(block, row);
    const base = row * rowSamples;
    for (let i = 0; i < count; i++) {
      const bounds = runs[matched[i]!]!;
      for (let b = 0; b < bounds.length; b += 2) {
        const end = base + bounds[b + 1]!;
        for (let at = base + bounds[b]!; at < end; at++) {
          const value = weight[at]!;
          if (value > 0 && value < Number.POSITIVE_INFINITY) weight[at] = -value;
        }
      }
    }
  }
}

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
 */
export async function countSelections(
  dataset: Dataset,
  selections: readonly Selection[],
): Promise<SelectionCounts> {
  const matcher = compileSelections(dataset, selections);
  const rowSamples = rowSamplesOf(dataset);
  const quantum = await weightQuantum(dataset);
  const tally = new Tally(selections.length, rowSamples, quantum);
  for await (const block of dataset.blocks({ want: "weights" })) {
    for (let row = 0; row < block.rows; row++) tally.addRow(matcher, block, row);
  }
  return tally.counts();
}

class Tally {
  private readonly rowSamples: number;
  private readonly quantum: number;
  /** by selection, then the union, then the whole dataset */
  private readonly samples: Float64Array;
  private readonly unflagged: Float64Array;
  private readonly fresh: Float64Array;
  private readonly weight: Float64Array;
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

  counts(): SelectionCounts {
    const at = (slot: number): SelectionCount => ({
      samples: this.samples[slot]!,
      unflagged: this.unflagged[slot]!,
      fresh: this.fresh[slot]!,
      weight: this.weight[slot]!,
    });
    const selections = this.samples.length - 2;
    return {
      each: Array.from({ length: selections }, (_, slot) => at(slot)),
      union: at(selections),
      total: at(selections + 1),
    };
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
