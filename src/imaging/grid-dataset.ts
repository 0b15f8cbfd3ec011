/**
 * The pass over a dataset's weights that fills uv grids: every usable sample at the (u, v) of its own channel.
 */
import type { Dataset, SampleBlock } from "../dataset/dataset.ts";
import type { Selection } from "../dataset/selection.ts";
import { compileSelections } from "../dataset/selection-matcher.ts";
import type { Survey } from "../measure/survey-result.ts";
import type { Workers } from "../util/workers.ts";
import { type CoverageForm, CoverageTally } from "./coverage-tally.ts";
import { fillShared, type GridSums } from "./grid-share.ts";
import { type CellIndex, type GridForm, MomentGrid } from "./moment-grid.ts";
import { AntennaNoise } from "./other-noise.ts";
import { RowDeposit } from "./row-deposit.ts";
import { type RowPart, RowWeights } from "./row-weights.ts";
import type { Sampling } from "./sampling.ts";

/** Moments kept of all the data: beams to 4e-4 of a cell's share at the very edge of the field. */
export const FULL_ORDER = 5;
/** Moments kept of each selection, whose share of the beam is small. */
export const SELECTION_ORDER = 3;

/** Which rows an image uses, and where their baseline's noise is kept. */
class RowChooser {
  private readonly field: number;
  private readonly offsets = new Map<number, number>();
  /** where there are baselines that are not in the survey */
  private readonly others: AntennaNoise | null;
  private readonly rowSamples: number;

  constructor({ sampling, variance }: GridSource) {
    const { survey } = sampling;
    const { subbands, channels, polarizations } = survey.dataset.shape;
    this.field = sampling.field.id;
    this.rowSamples = subbands * channels * polarizations;
    survey.baselines.forEach(({ antenna1, antenna2 }, index) => {
      this.offsets.set(pairKey(antenna1, antenna2), index * this.rowSamples);
    });
    this.others = survey.others === undefined ? null : new AntennaNoise(survey, this.rowSamples, variance);
  }

  /** First sample of the row's baseline in the levels, or -1 when the image does not use the row. */
  offset(block: SampleBlock, row: number): number {
    const antenna1 = block.antenna1[row]!;
    const antenna2 = block.antenna2[row]!;
    if (antenna1 === antenna2 || block.field[row] !== this.field) return -1;
    if (!Number.isFinite(block.u[row]! + block.v[row]!)) return -1;
    return this.offsets.get(pairKey(antenna1, antenna2)) ?? this.others?.offset(antenna1, antenna2) ?? -1;
  }
}

function pairKey(antenna1: number, antenna2: number): number {
  return antenna1 < antenna2 ? antenna1 * 65536 + antenna2 : antenna2 * 65536 + antenna1;
}

export interface Gridded {
  readonly grid: MomentGrid;
  readonly coverage: CoverageTally;
  /** what the flagged samples would add; null where none is flagged */
  readonly flagged: { readonly grid: MomentGrid; readonly coverage: CoverageTally } | null;
}

/** What of a sampling the passes need: little enough to be sent to other threads. */
export interface GridSampling extends Pick<Sampling, "field" | "products" | "everLongest"> {
  readonly survey: Pick<Survey, "dataset" | "baselines" | "totals" | "others">;
}

/** What a pass needs, in whatever thread. */
export interface GridSource {
  readonly sampling: GridSampling;
  /**
   * (baselines x subbands x channels x polarizations) weight x variance of a sample; NaN unknown. Where there are
   * baselines that are not in the survey, the same of antennas follows.
   */
  readonly variance: Float64Array;
  readonly form: GridForm;
  readonly coverageForm: CoverageForm;
  /** [first, end); default all */
  readonly rows?: readonly [number, number];
  /** threads that share the rows; none: this one reads them all. The result is the same. */
  readonly workers?: Workers | undefined;
  /** told the share of the rows that is done */
  readonly onProgress?: ((share: number) => void) | undefined;
}

/** A pass asked for from the main thread. */
export interface GridRequest extends GridSource {
  readonly sampling: Sampling;
}

/** Grid every usable sample of the image. */
export async function gridDataset(request: GridSource): Promise<Gridded> {
  const { sampling, variance, form } = request;
  const { dataset } = sampling.survey;
  const grid = new MomentGrid(form);
  const coverage = new CoverageTally(request.coverageForm);
  const row = new RowWeights(dataset, sampling.products);
  const deposit = new RowDeposit(dataset, form.order);
  // Of the flagged samples only which cells they fill is asked.
  const flagged =
    sampling.survey.totals.flagged > 0
      ? {
          grid: new MomentGrid(flaggedForm(sampling, form)),
          coverage: new CoverageTally(request.coverageForm),
        }
      : null;
  const all = { grid, coverage, flagged };
  if (await fillShared(request, { kind: "all" }, sumsOf(all))) return all;
  const flaggedRow = new RowWeights(dataset, sampling.products);
  await eachRow(request, (block, at, rowFrom, levelFrom) => {
    row.fill(block.weight, rowFrom, variance, levelFrom);
    deposit.place(block, at);
    deposit.addTo(grid, row);
    deposit.cover(coverage, row, 1);
    if (flagged !== null && flaggedRow.fillFlagged(block.weight, rowFrom)) {
      deposit.addTo(flagged.grid, flaggedRow);
      deposit.cover(flagged.coverage, flaggedRow, 1);
    }
  });
  return all;
}

export function sumsOf({ grid, coverage, flagged }: Gridded): GridSums {
  if (flagged === null) return { grids: [grid], tallies: [coverage] };
  return { grids: [grid, flagged.grid], tallies: [coverage, flagged.coverage] };
}

/** Cells from the origin to the edge of a grid of which only the filled cells are asked. */
const MOST_FLAGGED_HALF = 2000;

/** Flagged baselines may be longer than any that is left. */
function flaggedForm({ everLongest }: GridSampling, form: GridForm): GridForm {
  const reach = Math.ceil(everLongest * form.field) + 2;
  return { ...form, order: 0, half: Math.max(form.half, Math.min(reach, MOST_FLAGGED_HALF)) };
}

/** One selection's own samples, on the index of the grid of all. */
export interface SelectionGrid {
  readonly grid: MomentGrid;
  /** the coverage that the data lose with it */
  readonly lost: CoverageTally;
}

/** Grid the usable samples of each selection, in one pass. */
export async function gridSelections(
  request: GridSource,
  selections: readonly Selection[],
  index: CellIndex,
): Promise<SelectionGrid[]> {
  const { sampling, variance } = request;
  const { dataset } = sampling.survey;
  const form = { ...request.form, order: SELECTION_ORDER };
  const grids = selections.map(() => ({
    grid: new MomentGrid(form, index),
    lost: new CoverageTally(request.coverageForm),
  }));
  const sums = { grids: grids.map(({ grid }) => grid), tallies: grids.map(({ lost }) => lost) };
  if (await fillShared(request, { kind: "selections", selections }, sums)) return grids;
  const matcher = compileSelections(dataset, selections);
  const parts = matcher.runs.map((bounds) => partOf(dataset, bounds));
  const whole = new RowWeights(dataset, sampling.products);
  const row = new RowWeights(dataset, sampling.products);
  const deposit = new RowDeposit(dataset, form.order);
  await eachRow(request, (block, at, rowFrom, levelFrom) => {
    const count = matcher.matchRow(block, at);
    if (count === 0) return;
    deposit.place(block, at);
    whole.fill(block.weight, rowFrom, variance, levelFrom);
    for (let i = 0; i < count; i++) {
      const s = matcher.matched[i]!;
      const part = parts[s]!;
      const { grid, lost } = grids[s]!;
      row.fillPart(block.weight, rowFrom, variance, levelFrom, part, 1);
      deposit.addTo(grid, row);
      // A row loses what it covered with everything, less what it still covers.
      deposit.cover(lost, whole, 1, part.first, part.last);
      row.fillPart(block.weight, rowFrom, variance, levelFrom, part, 0);
      deposit.cover(lost, row, -1);
    }
  });
  return grids;
}

/** @param bounds [start, end) pairs of sample offsets in a row */
export function partOf(dataset: Dataset, bounds: Int32Array): RowPart {
  const { subbands, channels, polarizations } = dataset.shape;
  const mask = new Uint8Array(subbands * channels * polarizations);
  for (let b = 0; b < bounds.length; b += 2) mask.fill(1, bounds[b]!, bounds[b + 1]!);
  const subband = (sample: number) => Math.floor(sample / (channels * polarizations));
  if (bounds.length === 0) return { mask, first: 0, last: 0 };
  return { mask, first: subband(bounds[0]!), last: subband(bounds.at(-1)! - 1) + 1 };
}

/** Visit the rows of the image with the offsets of their samples in the block and in the levels. */
export async function eachRow(
  request: GridSource,
  visit: (block: SampleBlock, row: number, rowFrom: number, levelFrom: number) => void,
): Promise<void> {
  const { sampling, onProgress } = request;
  const { dataset } = sampling.survey;
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  const chooser = new RowChooser(request);
  const [first, end] = request.rows ?? [0, dataset.rows];
  for await (const block of dataset.blocks({ want: "weights", rows: [first, end] })) {
    for (let row = 0; row < block.rows; row++) {
      const levelFrom = chooser.offset(block, row);
      if (levelFrom >= 0) visit(block, row, row * rowSamples, levelFrom);
    }
    onProgress?.((block.firstRow + block.rows - first) / (end - first));
  }
}
