/** Flags that a dataset keeps in a table beside its samples: they turn the weights of what they name negative. */
import type { SampleBlock, Shape } from "./dataset.ts";

/** One entry: the AND of its parts. */
export interface TableFlag {
  /** Field.id; null: all */
  readonly field: number | null;
  readonly subarray: number | null;
  /** index of the setup */
  readonly setup: number | null;
  /** every baseline to it; null: all antennas */
  readonly antenna: number | null;
  /** with `antenna`: only the baseline between both */
  readonly otherAntenna: number | null;
  /** MJD (UTC, days), both ends included; -Infinity and Infinity: all times */
  readonly start: number;
  readonly end: number;
  /** from 0, both ends included */
  readonly subbands: readonly [number, number];
  readonly channels: readonly [number, number];
  /** one a product of the dataset */
  readonly polarizations: readonly boolean[];
}

/** Entries ready to be laid over blocks: in order of start, so that few are looked at for each. */
export class TableFlags {
  readonly #flags: readonly TableFlag[];
  /** latest end among the entries up to each */
  readonly #latestEnd: Float64Array;

  constructor(flags: readonly TableFlag[]) {
    this.#flags = [...flags].sort((a, b) => a.start - b.start);
    this.#latestEnd = new Float64Array(flags.length);
    let latest = Number.NEGATIVE_INFINITY;
    this.#flags.forEach(({ end }, i) => {
      latest = Math.max(latest, end);
      this.#latestEnd[i] = latest;
    });
  }

  /** Make the weights of `block` negative where an entry names the sample. Rows without a time match no time range. */
  apply(block: SampleBlock, shape: Shape): void {
    const [first, last] = timesOf(block);
    for (let i = this.#countUntil(last) - 1; i >= 0 && this.#latestEnd[i]! >= first; i--) {
      const flag = this.#flags[i]!;
      if (flag.end >= first) applyOne(flag, block, shape);
    }
  }

  /** Entries that start at `time` or before. */
  #countUntil(time: number): number {
    let low = 0;
    let high = this.#flags.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.#flags[middle]!.start <= time) low = middle + 1;
      else high = middle;
    }
    return low;
  }
}

function timesOf({ rows, time }: SampleBlock): [number, number] {
  let first = Number.POSITIVE_INFINITY;
  let last = Number.NEGATIVE_INFINITY;
  for (let row = 0; row < rows; row++) {
    if (time[row]! < first) first = time[row]!;
    if (time[row]! > last) last = time[row]!;
    // Entries for all times hold for rows without one.
    if (Number.isNaN(time[row]!)) return [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
  }
  return [first, last];
}

function applyOne(flag: TableFlag, block: SampleBlock, shape: Shape): void {
  const { weight } = block;
  const { channels, polarizations } = shape;
  const [firstSubband, lastSubband] = flag.subbands;
  const [firstChannel, lastChannel] = flag.channels;
  const perRow = shape.subbands * channels * polarizations;
  for (let row = 0; row < block.rows; row++) {
    if (!matches(flag, block, row)) continue;
    for (let subband = firstSubband; subband <= lastSubband; subband++) {
      for (let channel = firstChannel; channel <= lastChannel; channel++) {
        const at = row * perRow + (subband * channels + channel) * polarizations;
        for (let p = 0; p < polarizations; p++) {
          if (flag.polarizations[p]) weight[at + p] = -Math.abs(weight[at + p]!);
        }
      }
    }
  }
}

function matches(flag: TableFlag, block: SampleBlock, row: number): boolean {
  const time = block.time[row]!;
  if (time < flag.start || time > flag.end) return false;
  if (Number.isNaN(time) && flag.end !== Number.POSITIVE_INFINITY) return false;
  const { antenna, otherAntenna } = flag;
  if (antenna !== null) {
    const one = block.antenna1[row]!;
    const two = block.antenna2[row]!;
    if (antenna !== one && antenna !== two) return false;
    if (otherAntenna !== null && (antenna === one ? two : one) !== otherAntenna) return false;
  }
  if (flag.field !== null && flag.field !== block.field[row]) return false;
  if (flag.subarray !== null && flag.subarray !== block.subarray[row]) return false;
  return flag.setup === null || flag.setup === block.setup[row];
}
