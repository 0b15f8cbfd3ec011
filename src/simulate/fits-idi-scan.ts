/** A first look at the rows to write: what the tables before them must say, and whether weights go by channel. */
import type { Dataset, SampleBlock, Shape } from "../dataset/dataset.ts";

export interface RowScan {
  /** ascending, at least one */
  readonly subarrays: readonly number[];
  /** MJD (UTC, days); NaN when no time is finite */
  readonly firstTime: number;
  readonly lastTime: number;
  /** somewhere the channels of one product and sub-band of a row differ in weight */
  readonly weightsByChannel: boolean;
}

/** @param rows to look at, [first, end) */
export async function scanRows(dataset: Dataset, rows: readonly [number, number]): Promise<RowScan> {
  const subarrays = new Set<number>();
  let firstTime = Number.POSITIVE_INFINITY;
  let lastTime = Number.NEGATIVE_INFINITY;
  let weightsByChannel = false;
  const want = dataset.hasWeights && dataset.shape.channels > 1 ? "weights" : "rows";
  for await (const block of dataset.blocks({ want, rows })) {
    for (let row = 0; row < block.rows; row++) {
      subarrays.add(block.subarray[row]!);
      const time = block.time[row]!;
      if (time < firstTime) firstTime = time;
      if (time > lastTime) lastTime = time;
    }
    if (want === "weights") weightsByChannel ||= differsByChannel(block, dataset.shape);
  }
  return {
    subarrays: subarrays.size === 0 ? [1] : [...subarrays].sort((a, b) => a - b),
    firstTime: Number.isFinite(firstTime) ? firstTime : Number.NaN,
    lastTime: Number.isFinite(lastTime) ? lastTime : Number.NaN,
    weightsByChannel,
  };
}

function differsByChannel(
  { rows, weight }: SampleBlock,
  { subbands, channels, polarizations }: Shape,
): boolean {
  const spectrum = channels * polarizations;
  const end = rows * subbands * spectrum;
  for (let at = 0; at < end; at += spectrum) {
    for (let i = at + polarizations; i < at + spectrum; i++) {
      if (!Object.is(weight[i], weight[i - polarizations])) return true;
    }
  }
  return false;
}
