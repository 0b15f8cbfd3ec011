/** An empty block of rows, for readers to fill. */
import { type Arena, kernelMemory } from "../util/kernels/memory.ts";
import type { BlockRequest, SampleBlock, Shape } from "./dataset.ts";

/**
 * Arrays that are not wanted are empty.
 *
 * @param arena of the kernels' memory, where the samples are to lie if there is room; else, or without it, anywhere
 */
export function newBlock(rows: number, shape: Shape, want: BlockRequest["want"], arena?: Arena): SampleBlock {
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
    real: numbers(want === "samples" ? samples : 0, arena),
    imag: numbers(want === "samples" ? samples : 0, arena),
    weight: numbers(want === "rows" ? 0 : samples, arena),
  };
}

function numbers(length: number, arena: Arena | undefined): Float32Array {
  const address = length === 0 ? undefined : arena?.allocate(4 * length);
  if (address === undefined) return new Float32Array(length);
  return new Float32Array(kernelMemory.heap.f32.buffer, address, length);
}
