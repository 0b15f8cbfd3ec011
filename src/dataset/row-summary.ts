/** What the rows of a dataset hold, from one pass over their columns; no sample is converted. */
import { InputError } from "../util/errors.ts";
import type { Dataset, SampleBlock } from "./dataset.ts";

/** A few rows spread over the file, for asking which reading of the antenna positions explains them. */
export interface ProbeRow {
  /** MJD, days */
  readonly time: number;
  /** light travel, seconds */
  readonly u: number;
  readonly v: number;
  readonly w: number;
  readonly antenna1: number;
  readonly antenna2: number;
  readonly subarray: number;
  readonly field: number;
}

/** Plain data: a worker may be sent it instead of counting again. */
export interface RowSummary {
  readonly rows: number;
  /** MJD (UTC, days) of the first and last integration centre; NaN when no time is finite */
  readonly firstTime: number;
  readonly lastTime: number;
  /** rows whose time is not finite */
  readonly rowsWithoutTime: number;
  /** different integration centres, or `MOST_TIMES` when there are more */
  readonly times: number;
  /** seconds; NaN where the file does not say */
  readonly shortestIntegration: number;
  readonly longestIntegration: number;
  /** numbers met in the rows, ascending */
  readonly antennas: readonly number[];
  readonly subarrays: readonly number[];
  /** baselines between different antennas, either way round counted once; at most `MOST_BASELINES` are told apart */
  readonly baselines: number;
  readonly autocorrelations: number;
  readonly fields: readonly { readonly id: number; readonly rows: number }[];
  readonly setups: readonly { readonly index: number; readonly rows: number }[];
  /** rows with u, v or w not finite */
  readonly rowsWithoutUvw: number;
  /** longest and shortest |u, v| between different antennas, light travel in seconds; NaN without any */
  readonly longestSpacing: number;
  readonly shortestSpacing: number;
  /** every w of rows between different antennas is exactly 0 */
  readonly wAllZero: boolean;
  readonly probe: readonly ProbeRow[];
}

/** A Dataset that has already looked at its rows. */
export interface OpenedDataset extends Dataset {
  readonly summary: RowSummary;
}

export const MOST_TIMES = 1 << 20;
/** 2048 antennas have two million; numbers without end must not fill the memory. */
const MOST_BASELINES = 1 << 22;
const MOST_FIELDS = 65_536;
const PROBE_ROWS = 256;

/** One pass over the rows of `dataset`. @throws InputError where they are malformed */
export async function summarizeRows(
  dataset: Pick<Dataset, "rows" | "blocks">,
  onProgress: (rows: number) => void = () => {},
): Promise<RowSummary> {
  const count = new RowCount(Math.max(1, Math.ceil(dataset.rows / PROBE_ROWS)));
  for await (const block of dataset.blocks({ want: "rows" })) {
    count.add(block);
    onProgress(block.rows);
  }
  return count.summary();
}

class RowCount {
  readonly #probeEvery: number;
  #rows = 0;
  #firstTime = Number.POSITIVE_INFINITY;
  #lastTime = Number.NEGATIVE_INFINITY;
  #rowsWithoutTime = 0;
  #shortestIntegration = Number.POSITIVE_INFINITY;
  #longestIntegration = Number.NEGATIVE_INFINITY;
  #autocorrelations = 0;
  #rowsWithoutUvw = 0;
  #longest = Number.NEGATIVE_INFINITY;
  #shortest = Number.POSITIVE_INFINITY;
  #wAllZero = true;
  readonly #times = new Set<number>();
  readonly #antennas = new Set<number>();
  readonly #baselines = new Set<number>();
  readonly #subarrays = new Set<number>();
  readonly #fields = new Map<number, number>();
  readonly #setups = new Map<number, number>();
  readonly #probe: ProbeRow[] = [];

  constructor(probeEvery: number) {
    this.#probeEvery = probeEvery;
  }

  add(block: SampleBlock): void {
    this.#addTimes(block);
    this.#addAntennas(block);
    this.#addCoordinates(block);
    tally(this.#fields, block.field, block.rows);
    tally(this.#setups, block.setup, block.rows);
    if (this.#fields.size > MOST_FIELDS) {
      throw new InputError(
        `the rows name more than ${MOST_FIELDS} fields: expected some hundreds at most`,
        { row: block.firstRow + 1 },
        "The field numbers are damaged",
      );
    }
    const every = this.#probeEvery;
    for (let row = (every - (block.firstRow % every)) % every; row < block.rows; row += every) {
      this.#probe.push(probeRow(block, row));
    }
    this.#rows += block.rows;
  }

  #addTimes({ rows, time, integration }: SampleBlock): void {
    const times = this.#times;
    let previous = Number.NaN;
    for (let row = 0; row < rows; row++) {
      const t = time[row]!;
      const seconds = integration[row]!;
      if (seconds < this.#shortestIntegration) this.#shortestIntegration = seconds;
      if (seconds > this.#longestIntegration) this.#longestIntegration = seconds;
      if (t === previous) continue;
      if (Number.isNaN(t)) {
        this.#rowsWithoutTime++;
        continue;
      }
      previous = t;
      if (t < this.#firstTime) this.#firstTime = t;
      if (t > this.#lastTime) this.#lastTime = t;
      if (times.size < MOST_TIMES) times.add(t);
    }
  }

  #addAntennas({ rows, antenna1, antenna2, subarray }: SampleBlock): void {
    const baselines = this.#baselines;
    let previousSubarray = -1;
    for (let row = 0; row < rows; row++) {
      const a = antenna1[row]!;
      const b = antenna2[row]!;
      if (subarray[row] !== previousSubarray) {
        previousSubarray = subarray[row]!;
        this.#subarrays.add(previousSubarray);
      }
      if (a === b) {
        this.#autocorrelations++;
        this.#antennas.add(a);
        continue;
      }
      // Baselines come round again with every integration: one look-up a row, not three.
      const key = a < b ? a * 65536 + b : b * 65536 + a;
      if (baselines.has(key)) continue;
      if (baselines.size < MOST_BASELINES) baselines.add(key);
      this.#antennas.add(a);
      this.#antennas.add(b);
    }
  }

  #addCoordinates({ rows, u, v, w, antenna1, antenna2 }: SampleBlock): void {
    for (let row = 0; row < rows; row++) {
      const squared = u[row]! * u[row]! + v[row]! * v[row]!;
      if (!Number.isFinite(squared + w[row]!)) {
        this.#rowsWithoutUvw++;
        continue;
      }
      if (antenna1[row] === antenna2[row]) continue;
      if (squared > this.#longest) this.#longest = squared;
      if (squared < this.#shortest) this.#shortest = squared;
      if (w[row] !== 0) this.#wAllZero = false;
    }
  }

  summary(): RowSummary {
    return {
      rows: this.#rows,
      firstTime: finiteOrNaN(this.#firstTime),
      lastTime: finiteOrNaN(this.#lastTime),
      rowsWithoutTime: this.#rowsWithoutTime,
      times: this.#times.size,
      shortestIntegration: finiteOrNaN(this.#shortestIntegration),
      longestIntegration: finiteOrNaN(this.#longestIntegration),
      antennas: [...this.#antennas].sort((a, b) => a - b),
      subarrays: [...this.#subarrays].sort((a, b) => a - b),
      baselines: this.#baselines.size,
      autocorrelations: this.#autocorrelations,
      fields: sorted(this.#fields).map(([id, rows]) => ({ id, rows })),
      setups: sorted(this.#setups).map(([index, rows]) => ({ index, rows })),
      rowsWithoutUvw: this.#rowsWithoutUvw,
      longestSpacing: Math.sqrt(finiteOrNaN(this.#longest)),
      shortestSpacing: Math.sqrt(finiteOrNaN(this.#shortest)),
      wAllZero: this.#wAllZero,
      probe: this.#probe,
    };
  }
}

function tally(counts: Map<number, number>, values: Int32Array, rows: number): void {
  // Runs of one value are the rule: count a run at a time.
  for (let row = 0; row < rows; ) {
    const value = values[row]!;
    let end = row + 1;
    while (end < rows && values[end] === value) end++;
    counts.set(value, (counts.get(value) ?? 0) + end - row);
    row = end;
  }
}

function sorted(counts: ReadonlyMap<number, number>): [number, number][] {
  return [...counts].sort(([a], [b]) => a - b);
}

function probeRow(block: SampleBlock, row: number): ProbeRow {
  return {
    time: block.time[row]!,
    u: block.u[row]!,
    v: block.v[row]!,
    w: block.w[row]!,
    antenna1: block.antenna1[row]!,
    antenna2: block.antenna2[row]!,
    subarray: block.subarray[row]!,
    field: block.field[row]!,
  };
}

function finiteOrNaN(value: number): number {
  return Number.isFinite(value) ? value : Number.NaN;
}
