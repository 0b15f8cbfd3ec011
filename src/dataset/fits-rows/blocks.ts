/** The rows of a file in blocks: one buffer is filled from the file while the block before it is used. */
import { InputError } from "../../util/errors.ts";
import type { BlockRequest, SampleBlock } from "../dataset.ts";
import type { ByteSource, Cursor } from "../fits/byte-source.ts";
import { newBlock } from "../new-block.ts";
import type { GroupLayout } from "../random-groups/layout.ts";
import type { TableFlags } from "../table-flags.ts";
import { type BlockRange, blockRange, planReads, type ReadPlan } from "./plan.ts";
import { fillRows, fillSum, type RawRows, type RowContext } from "./rows.ts";
import {
  fillPlainSamples,
  fillPlainWeights,
  fillScaledSamples,
  type GroupFactors,
  isPlainFloat,
  type SampleLayout,
  sampleLayout,
} from "./samples.ts";

/** @throws InputError where the file is malformed; RangeError for a request that makes no sense */
export async function* readBlocks(
  source: ByteSource,
  layout: GroupLayout,
  context: RowContext,
  flags: TableFlags | undefined,
  request: BlockRequest,
): AsyncGenerator<SampleBlock> {
  const samples = sampleLayout(layout);
  const plan = planReads(layout, samples.shape, request);
  if (plan.firstRow === plan.endRow) return;
  const decode = blockDecoder(layout, samples, context, plan, request);
  const laysFlags = request.want !== "rows" && flags !== undefined;
  const cursor = await source.cursor(blockRange(layout, plan, plan.firstRow).byte);
  const buffers = [newBuffer(plan), newBuffer(plan)];
  const read = (row: number, k: number) => {
    const range = blockRange(layout, plan, row);
    const reading = readRange(source, cursor, layout, plan, range, buffers[k % 2]!);
    // Rejections are met where the block is awaited; an iterator that is left early must not leave one unhandled.
    reading.catch(() => {});
    return reading;
  };
  let pending = read(plan.firstRow, 0);
  try {
    for (let row = plan.firstRow, k = 0; row < plan.endRow; row += plan.blockRows, k++) {
      const bytes = await pending;
      const range = blockRange(layout, plan, row);
      if (row + range.rows < plan.endRow) pending = read(row + range.rows, k + 1);
      const block = decode(bytes, range);
      if (laysFlags) flags.apply(block, samples.shape);
      yield block;
    }
  } finally {
    await pending.catch(() => {});
    await cursor.close();
  }
}

function newBuffer(plan: ReadPlan): Uint8Array {
  return new Uint8Array(plan.blockRows * plan.rowBytes);
}

/** Row by row when most of each group is skipped, else in one read. */
async function readRange(
  source: ByteSource,
  cursor: Cursor,
  layout: GroupLayout,
  plan: ReadPlan,
  range: BlockRange,
  buffer: Uint8Array,
): Promise<Uint8Array> {
  const bytes = buffer.subarray(0, range.rows * plan.rowBytes);
  if (!plan.scattered) {
    requireAll(layout, range, await cursor.read(bytes, range.byte), bytes.length);
    return bytes;
  }
  const readRow = async (row: number) => {
    const part = bytes.subarray(row * plan.rowBytes, (row + 1) * plan.rowBytes);
    const got = await cursor.read(part, range.byte + row * layout.groupBytes);
    requireAll(layout, { ...range, firstRow: range.firstRow + row }, got, part.length);
  };
  const together = source.sequential ? 1 : 32;
  for (let row = 0; row < range.rows; row += together) {
    const count = Math.min(together, range.rows - row);
    await Promise.all(Array.from({ length: count }, (_, k) => readRow(row + k)));
  }
  return bytes;
}

/** The size was right when the file was opened. */
function requireAll(layout: GroupLayout, range: BlockRange, got: number, expected: number): void {
  if (got === expected) return;
  throw new InputError(
    `the file now ends at byte ${range.byte + got}: expected ${expected} bytes of group ${range.firstRow + 1} and after`,
    { ...layout.hdu.header.place, byte: range.byte },
    "The file became shorter while it was read: wait until it is written",
  );
}

/** A function that turns the bytes of a range into the one block that it fills again and again. */
function blockDecoder(
  layout: GroupLayout,
  samples: SampleLayout,
  context: RowContext,
  plan: ReadPlan,
  request: BlockRequest,
): (bytes: Uint8Array, range: BlockRange) => SampleBlock {
  const block = newBlock(plan.blockRows, samples.shape, request.want);
  const scratch = new Float64Array(plan.blockRows);
  const fill = sampleFiller(samples, context, plan, request.want);
  return (bytes, range) => {
    const raw: RawRows = {
      view: new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength),
      rows: range.rows,
      stride: plan.rowBytes,
      bitpix: layout.bitpix,
      firstRow: range.firstRow,
      place: layout.hdu.header.place,
      byte: range.byte,
      groupBytes: layout.groupBytes,
    };
    block.firstRow = range.firstRow;
    block.rows = range.rows;
    fillRows(raw, context, scratch, block);
    fill(raw, block);
    return block;
  };
}

function sampleFiller(
  samples: SampleLayout,
  context: RowContext,
  plan: ReadPlan,
  want: BlockRequest["want"],
): (raw: RawRows, block: SampleBlock) => void {
  if (want === "rows") return () => {};
  if (isPlainFloat(samples)) {
    return want === "samples"
      ? (raw, block) => fillPlainSamples(raw.view, raw.rows, samples, block)
      : (raw, block) => fillPlainWeights(raw.view, raw.rows, samples, block.weight);
  }
  const factors = samples.hasWeight ? undefined : newFactors(plan.blockRows);
  return (raw, block) => {
    if (factors !== undefined) fillFactors(raw, context, factors);
    fillScaledSamples(raw.view, raw.rows, samples, factors, block, want === "samples");
  };
}

function newFactors(rows: number): GroupFactors {
  return { weight: new Float64Array(rows).fill(1), scale: new Float64Array(rows).fill(1) };
}

function fillFactors(raw: RawRows, { columns }: RowContext, factors: GroupFactors): void {
  if (columns.weight !== undefined) fillSum(raw, columns.weight, factors.weight);
  if (columns.scale !== undefined) fillSum(raw, columns.scale, factors.scale);
}
