/** Several invented datasets as one: rows of each integration side by side, as sub-arrays, setups or fields would be. */
import type { BlockRequest, Dataset, SampleBlock } from "../../src/dataset/dataset.ts";
import { newBlock } from "../../src/dataset/new-block.ts";

const ROW_COLUMNS = [
  "time",
  "u",
  "v",
  "w",
  "antenna1",
  "antenna2",
  "subarray",
  "field",
  "setup",
  "integration",
] as const;
const SAMPLE_COLUMNS = ["real", "imag", "weight"] as const;

export interface Member {
  readonly dataset: Dataset;
  /** what is different about its rows */
  readonly change: (block: SampleBlock) => void;
}

/** @param parts tables of the whole */
export async function together(members: readonly Member[], parts: Partial<Dataset>): Promise<Dataset> {
  const [first] = members;
  const { shape } = first!.dataset;
  const rowSamples = shape.subbands * shape.channels * shape.polarizations;
  const rows = members.reduce((sum, { dataset }) => sum + dataset.rows, 0);
  const all = newBlock(rows, shape, "samples");
  for (const { dataset, change } of members) {
    for await (const block of dataset.blocks({ want: "samples" })) {
      change(block);
      for (const key of ROW_COLUMNS) all[key].set(block[key].subarray(0, block.rows), all.rows);
      for (const key of SAMPLE_COLUMNS) {
        all[key].set(block[key].subarray(0, block.rows * rowSamples), all.rows * rowSamples);
      }
      all.rows += block.rows;
    }
  }
  const order = Uint32Array.from({ length: rows }, (_, row) => row).sort(
    (a, b) => all.time[a]! - all.time[b]! || a - b,
  );
  return {
    ...first!.dataset,
    rows,
    ...parts,
    blocks: (request) => inOrder(all, order, rowSamples, shape, request),
  };
}

async function* inOrder(
  all: SampleBlock,
  order: Uint32Array,
  rowSamples: number,
  shape: Dataset["shape"],
  request: BlockRequest,
): AsyncGenerator<SampleBlock> {
  const [first, last] = request.rows ?? [0, order.length];
  const most = request.blockRows ?? 500;
  for (let row = first; row < last; row += most) {
    const block = newBlock(Math.min(most, last - row), shape, request.want);
    block.firstRow = row;
    block.rows = Math.min(most, last - row);
    for (let k = 0; k < block.rows; k++) {
      const from = order[row + k]!;
      for (const key of ROW_COLUMNS) block[key][k] = all[key][from]!;
      for (const key of SAMPLE_COLUMNS) {
        if (block[key].length === 0) continue;
        block[key].set(all[key].subarray(from * rowSamples, (from + 1) * rowSamples), k * rowSamples);
      }
    }
    yield block;
  }
}
