/** An empty block of rows, for readers to fill. */
import type { BlockRequest, SampleBlock, Shape } from "./dataset.ts";

/** Arrays that are not wanted are empty. */
export function newBlock(rows: number, shape: Shape, want: BlockRequest["want"]): SampleBlock {
  const samples = rows * shape.subbands * shape.channels * shape.polarizations;
  return {
    firstRow: 0,
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
    real: new Float32Array(want === "samples" ? samples : 0),
    imag: new Float32Array(want === "samples" ? samples : 0),
    weight: new Float32Array(want === "rows" ? 0 : samples),
  };
}
