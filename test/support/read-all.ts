/** A whole small dataset in one block, for tests that look at single samples. */
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

export async function readAll(
  dataset: Dataset,
  request: Omit<BlockRequest, "want"> & Partial<Pick<BlockRequest, "want">> = {},
): Promise<SampleBlock> {
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  const [first, last] = request.rows ?? [0, dataset.rows];
  const rows = last - first;
  const want = request.want ?? "samples";
  const all = newBlock(rows, dataset.shape, want);
  all.firstRow = first;
  for await (const block of dataset.blocks({ ...request, want })) {
    if (block.firstRow !== first + all.rows)
      throw new Error(`block at row ${block.firstRow}: a row is missing`);
    for (const key of ROW_COLUMNS) all[key].set(block[key].subarray(0, block.rows), all.rows);
    for (const key of SAMPLE_COLUMNS) {
      if (all[key].length === 0) continue;
      all[key].set(block[key].subarray(0, block.rows * rowSamples), all.rows * rowSamples);
    }
    all.rows += block.rows;
  }
  if (all.rows !== rows) throw new Error(`${all.rows} rows read, ${rows} expected`);
  return all;
}

/** Whether two columns hold the same bits, NaN included; quicker by far than comparing element by element. */
export function sameBits(a: Float32Array | Float64Array, b: Float32Array | Float64Array): boolean {
  const bytes = (array: Float32Array | Float64Array) =>
    Buffer.from(array.buffer, array.byteOffset, array.byteLength);
  return bytes(a).equals(bytes(b));
}
