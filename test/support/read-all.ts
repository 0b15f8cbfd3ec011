/** A whole small dataset in one block, for tests that look at single samples. */
import type { BlockRequest, Dataset, SampleBlock } from "../../src/dataset/dataset.ts";

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
  const samples = (wanted: boolean) => new Float32Array(wanted ? rows * rowSamples : 0);
  const all = {
    firstRow: first,
    rows: 0,
    time: new Float64Array(rows),
    u: new Float64Array(rows),
    v: new Float64Array(rows),
    w: new Float64Array(rows),
    antenna1: new Int32Array(rows),
    antenna2: new Int32Array(rows),
    subarray: new Int32Array(rows),
    field: new Int32Array(rows),
    setup: new Int32Array(rows),
    integration: new Float32Array(rows),
    real: samples(want === "samples"),
    imag: samples(want === "samples"),
    weight: samples(want !== "rows"),
  };
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
