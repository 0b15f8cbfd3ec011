/**
 * Rows gathered into tiles: as many as the dataset's shape alone says, sorted so that each baseline's integrations lie
 * together in order of time. What is found does not depend on how the reader cuts its blocks.
 */
import type { Dataset, SampleBlock } from "../../dataset/dataset.ts";
import type { Survey } from "../../measure/survey-result.ts";

/** Samples of a tile, and the integrations that it should hold if this many more samples allow. */
const TILE_SAMPLES = 1 << 22;
const MOST_TILE_SAMPLES = 1 << 24;
const WANTED_INTEGRATIONS = 32;

export function tileRows(dataset: Dataset, baselines: number): number {
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  const usual = TILE_SAMPLES / rowSamples;
  const wanted = WANTED_INTEGRATIONS * baselines;
  const most = MOST_TILE_SAMPLES / rowSamples;
  return Math.max(1, Math.min(dataset.rows, Math.floor(Math.min(most, Math.max(usual, wanted)))));
}

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

/**
 * The tiles of a dataset, one after the other in one buffer: valid until the next is asked for. Autocorrelations and
 * rows without a time are left out.
 */
export async function* tilesOf(
  survey: Survey,
  onRows: (rows: number) => void = () => {},
): AsyncIterable<Tile> {
  const { dataset } = survey;
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  const capacity = tileRows(dataset, survey.baselines.length);
  const tile = new Tile(capacity, rowSamples);
  const places = new RowPlaces(survey);
  let read = 0;
  // A tile ends at a row's number in the dataset, not at a count of rows kept.
  let end = capacity;
  for await (const block of dataset.blocks({ want: "samples" })) {
    for (let row = 0; row < block.rows; row++) {
      if (block.firstRow + row >= end) {
        yield tile;
        tile.rows = 0;
        end += capacity;
      }
      takeRow(tile, block, row, places);
    }
    read += block.rows;
    onRows(read);
  }
  if (tile.rows > 0) yield tile;
}

function takeRow(tile: Tile, block: SampleBlock, row: number, places: RowPlaces): void {
  const baseline = places.baselineOf(block.antenna1[row]!, block.antenna2[row]!);
  const time = block.time[row]!;
  if (baseline < 0 || Number.isNaN(time)) return;
  const cell = places.cellOf(baseline, time, block.field[row]!, block.setup[row]!, block.subarray[row]!);
  if (cell < 0) return;
  const { rowSamples } = tile;
  const to = tile.rows++;
  tile.baseline[to] = baseline;
  tile.cell[to] = cell;
  tile.setup[to] = block.setup[row]!;
  tile.time[to] = time;
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
    this.stride = 1 + Math.max(0, ...survey.baselines.map(({ antenna2 }) => antenna2));
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
  cellOf(baseline: number, time: number, field: number, setup: number, subarray: number): number {
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
