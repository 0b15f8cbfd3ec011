/**
 * Rows gathered into tiles: as many as the dataset's shape alone says, sorted so that each baseline's integrations lie
 * together in order of time. What is found does not depend on how the reader cuts its blocks.
 */
import type { SampleBlock } from "../../dataset/dataset.ts";
import type { TileShape } from "../../measure/screen/shape.ts";
import type { Survey } from "../../measure/survey-result.ts";
import { UNSEEN } from "./choice.ts";

/** Rows of one baseline and setup, in order of time. */
export interface RowRun {
  readonly baseline: number;
  readonly setup: number;
  /** places in `Tile.order` */
  readonly first: number;
  readonly rows: number;
}

export class Tile {
  readonly rowSamples: number;
  rows = 0;
  /** (rows) index into Survey.baselines, cell of the tracks */
  readonly baseline: Int32Array;
  readonly cell: Int32Array;
  readonly setup: Int32Array;
  readonly time: Float64Array;
  /** (rows x samples of a row); the imaginary part as from the lower to the higher antenna number */
  readonly real: Float32Array;
  readonly imag: Float32Array;
  /** (rows x samples of a row) 0 usable, 2 not */
  readonly missing: Uint8Array;
  readonly order: Int32Array;

  constructor(rows: number, rowSamples: number) {
    this.rowSamples = rowSamples;
    this.baseline = new Int32Array(rows);
    this.cell = new Int32Array(rows);
    this.setup = new Int32Array(rows);
    this.time = new Float64Array(rows);
    this.real = new Float32Array(rows * rowSamples);
    this.imag = new Float32Array(rows * rowSamples);
    this.missing = new Uint8Array(rows * rowSamples);
    this.order = new Int32Array(rows);
  }

  /** Runs of rows, by baseline, setup and time. */
  runs(): RowRun[] {
    const { baseline, setup, time, cell } = this;
    const order = this.order.subarray(0, this.rows);
    for (let i = 0; i < this.rows; i++) order[i] = i;
    order.sort(
      (a, b) =>
        baseline[a]! - baseline[b]! || setup[a]! - setup[b]! || time[a]! - time[b]! || cell[a]! - cell[b]!,
    );
    const runs: RowRun[] = [];
    for (let first = 0; first < this.rows; ) {
      const row = order[first]!;
      let last = first + 1;
      while (
        last < this.rows &&
        baseline[order[last]!] === baseline[row] &&
        setup[order[last]!] === setup[row]
      ) {
        last += 1;
      }
      runs.push({ baseline: baseline[row]!, setup: setup[row]!, first, rows: last - first });
      first = last;
    }
    return runs;
  }
}

/** Reads tiles, into one buffer: a tile is valid until the next is read. */
export class TileReader {
  private readonly survey: Survey;
  private readonly cut: TileShape;
  private readonly places: RowPlaces;
  private tile: Tile | null = null;

  constructor(survey: Survey, cut: TileShape) {
    this.survey = survey;
    this.cut = cut;
    this.places = new RowPlaces(survey);
  }

  /**
   * Autocorrelations, rows without a time and unseen baselines are left out.
   *
   * @param look  (baselines) UNSEEN: left out
   * @param other told of every row with a place in the survey that is left out
   * @throws InputError where the dataset turns out to be malformed
   */
  async read(number: number, look: Uint8Array, other: OnRow | null): Promise<Tile> {
    const { dataset } = this.survey;
    const { subbands, channels, polarizations } = dataset.shape;
    const { tileRows } = this.cut;
    const { tracks, others } = this.survey;
    // Of very many baselines only a choice has cells, one a row where they are no bins.
    const most = others !== undefined && tracks.binSeconds === 0 ? tracks.cells : dataset.rows;
    const capacity = Math.min(tileRows, most);
    this.tile ??= new Tile(capacity, subbands * channels * polarizations);
    const { tile, places } = this;
    tile.rows = 0;
    const rows = [number * tileRows, Math.min(dataset.rows, (number + 1) * tileRows)] as const;
    for await (const block of dataset.blocks({ want: "samples", rows })) {
      for (let row = 0; row < block.rows; row++) {
        const baseline = places.baselineOf(block.antenna1[row]!, block.antenna2[row]!);
        if (baseline < 0 || !Number.isFinite(block.time[row]!)) continue;
        const seen = look[baseline] !== UNSEEN;
        if (!seen && other === null) continue;
        const cell = places.cellOfRow(baseline, block, row);
        if (cell < 0) continue;
        if (seen) takeRow(tile, block, row, baseline, cell);
        else other!(block, row, cell);
      }
    }
    return tile;
  }
}

export type OnRow = (block: SampleBlock, row: number, cell: number) => void;

function takeRow(tile: Tile, block: SampleBlock, row: number, baseline: number, cell: number): void {
  const { rowSamples } = tile;
  const to = tile.rows++;
  tile.baseline[to] = baseline;
  tile.cell[to] = cell;
  tile.setup[to] = block.setup[row]!;
  tile.time[to] = block.time[row]!;
  const sign = block.antenna1[row]! > block.antenna2[row]! ? -1 : 1;
  const from = row * rowSamples;
  const at = to * rowSamples;
  const { real, imag, weight } = block;
  for (let i = 0; i < rowSamples; i++) {
    const re = real[from + i]!;
    const im = imag[from + i]!;
    const w = weight[from + i]!;
    const power = re * re + im * im;
    const usable = w > 0 && w < Number.POSITIVE_INFINITY && power > 0 && power < Number.POSITIVE_INFINITY;
    tile.missing[at + i] = usable ? 0 : 2;
    tile.real[at + i] = usable ? re : 0;
    tile.imag[at + i] = usable ? sign * im : 0;
  }
}

/** Where a row belongs in the survey. */
class RowPlaces {
  private readonly survey: Survey;
  private readonly numbers = new Map<number, number>();
  /** (baselines) cell that the last row of a baseline belonged to: the next one usually follows it */
  private readonly last: Int32Array;
  private readonly stride: number;

  constructor(survey: Survey) {
    this.survey = survey;
    // An array of thousands has more baselines than a call may have arguments.
    this.stride = 1 + survey.baselines.reduce((most, { antenna2 }) => Math.max(most, antenna2), 0);
    for (const [b, { antenna1, antenna2 }] of survey.baselines.entries()) {
      this.numbers.set(antenna1 * this.stride + antenna2, b);
    }
    this.last = Int32Array.from(survey.baselines, (_, b) => survey.tracks.firstCell[b]!);
  }

  /** -1 for autocorrelations and baselines without usable data */
  baselineOf(antenna1: number, antenna2: number): number {
    if (antenna1 === antenna2) return -1;
    const low = Math.min(antenna1, antenna2);
    return this.numbers.get(low * this.stride + (antenna1 + antenna2 - low)) ?? -1;
  }

  /** -1 where the survey knows no such row */
  cellOfRow(baseline: number, block: SampleBlock, row: number): number {
    const [field, setup, subarray] = [block.field[row]!, block.setup[row]!, block.subarray[row]!];
    return this.cellOf(baseline, block.time[row]!, field, setup, subarray);
  }

  private cellOf(baseline: number, time: number, field: number, setup: number, subarray: number): number {
    const { tracks } = this.survey;
    const first = tracks.firstCell[baseline]!;
    const end = tracks.firstCell[baseline + 1]!;
    let cell = this.last[baseline]!;
    const next = cell + 1;
    if (next < end && tracks.time[next]! <= time && !(next + 1 < end && tracks.time[next + 1]! <= time)) {
      cell = next;
    } else {
      cell = this.search(first, end, time);
    }
    // Rows of one time but of different fields, setups or sub-arrays lie side by side, and so do repeated rows.
    const same = (c: number) =>
      tracks.field[c] === field && tracks.setup[c] === setup && tracks.subarray[c] === subarray;
    while (cell > first && !same(cell) && tracks.time[cell - 1] === tracks.time[cell]) cell -= 1;
    if (cell < first || !same(cell)) return tracks.binSeconds > 0 ? this.nearest(first, end, time, same) : -1;
    this.last[baseline] = cell;
    return cell;
  }

  /** Last cell that does not begin after `time`. */
  private search(first: number, end: number, time: number): number {
    const times = this.survey.tracks.time;
    let low = first;
    let high = end;
    while (low < high) {
      const middle = (low + high) >>> 1;
      if (times[middle]! <= time) low = middle + 1;
      else high = middle;
    }
    return Math.max(first, low - 1);
  }

  /** In bins: the last one of the kind that does not begin after `time`, else the first of the kind. */
  private nearest(first: number, end: number, time: number, same: (cell: number) => boolean): number {
    let found = -1;
    for (let cell = first; cell < end; cell++) {
      if (same(cell) && (found < 0 || this.survey.tracks.time[cell]! <= time)) found = cell;
    }
    return found;
  }
}
