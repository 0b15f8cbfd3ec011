/**
 * Samples of float32 arrays by the compiled kernels, where the file has them in canonical order and both it and the
 * block lie in the kernels' memory; else by the loops of `samples.ts`.
 */
import { byteOrder } from "../../util/kernels/byte-order.ts";
import { kernelMemory } from "../../util/kernels/memory.ts";
import type { SampleBlock } from "../dataset.ts";
import { fillPlainPairs, fillPlainSamples, fillPlainWeights, type SampleLayout } from "./samples.ts";

/** Whether samples follow each other in the order of a block, `width` bytes each. */
function isCanonical(layout: SampleLayout, width: number): boolean {
  const { subbands, channels, polarizations } = layout.shape;
  const product = width * polarizations;
  return (
    layout.complexStep === 4 &&
    (polarizations === 1 || layout.polarizationStep === width) &&
    (channels === 1 || layout.channelStep === product) &&
    (subbands === 1 || layout.subbandStep === product * channels)
  );
}

/** Address of the first row's array, and samples of a row. */
function placeOf(view: DataView, { start, shape }: SampleLayout): [number | undefined, number] {
  const address = kernelMemory.addressOf(view);
  const samples = shape.subbands * shape.channels * shape.polarizations;
  return [address === undefined ? undefined : address + start, samples];
}

/** Samples from arrays with weights and no scaling. */
export function fillSamples(view: DataView, rows: number, layout: SampleLayout, block: SampleBlock): void {
  const [from, samples] = placeOf(view, layout);
  const [real, imag, weight] = [block.real, block.imag, block.weight].map((out) =>
    kernelMemory.addressOf(out),
  );
  if (
    from === undefined ||
    real === undefined ||
    imag === undefined ||
    weight === undefined ||
    !isCanonical(layout, 12)
  ) {
    fillPlainSamples(view, rows, layout, block);
  } else byteOrder.splitTriples(from, layout.rowBytes, rows, samples, real, imag, weight);
}

/** Real and imaginary parts from arrays without weights. */
export function fillPairs(view: DataView, rows: number, layout: SampleLayout, block: SampleBlock): void {
  const [from, samples] = placeOf(view, layout);
  const [real, imag] = [kernelMemory.addressOf(block.real), kernelMemory.addressOf(block.imag)];
  if (from === undefined || real === undefined || imag === undefined || !isCanonical(layout, 8)) {
    fillPlainPairs(view, rows, layout, block);
  } else byteOrder.splitPairs(from, layout.rowBytes, rows, samples, real, imag);
}

/** Weights alone. */
export function fillWeights(view: DataView, rows: number, layout: SampleLayout, out: Float32Array): void {
  const [from, samples] = placeOf(view, layout);
  const weight = kernelMemory.addressOf(out);
  if (from === undefined || weight === undefined || !isCanonical(layout, 12)) {
    fillPlainWeights(view, rows, layout, out);
  } else byteOrder.splitWeights(from, layout.rowBytes, rows, samples, weight);
}
