/** The rows of a file in blocks: one buffer is filled from the file while the block before it is used. */
import { InputError } from "../../util/errors.ts";
import type { BlockRequest, SampleBlock } from "../dataset.ts";
import type { ByteSource, Cursor } from "../fits/byte-source.ts";
import { newBlock } from "../new-block.ts";
import type { TableFlags } from "../table-flags.ts";
import { movedColumns, movedSum, type WeightColumns } from "./columns.ts";
import {
  type BlockRange,
  blockRange,
  placeInPieces,
  planReads,
  type ReadPlan,
  type RowStore,
} from "./plan.ts";
import { fillRows, fillSum, type RawRows, type RowContext } from "./rows.ts";
import {
  fillFactorWeights,
  fillPlainPairs,
  fillPlainSamples,
  fillPlainWeights,
  fillScaledSamples,
  isPlainFloat,
  isPlainPairs,
  type RowFactors,
  type SampleLayout,
} from "./samples.ts";

/** All that is known of a file's rows. */
export interface RowReader {
  readonly source: ByteSource;
  readonly store: RowStore;
  readonly samples: SampleLayout;
  readonly context: RowContext;
  /** of two-element arrays, which hold none */
  readonly weights: WeightColumns;
  readonly flags: TableFlags | undefined;
}

/** @throws InputError where the file is malformed; RangeError for a request that makes no sense */
export async function* readBlocks(reader: RowReader, request: BlockRequest): AsyncGenerator<SampleBlock> {
  const { source, store, samples, flags } = reader;
  const plan = planReads(store, samples.shape, request);
  if (plan.firstRow === plan.endRow) return;
  const decode = blockDecoder(reader, plan, request);
  const laysFlags = request.want !== "rows" && flags !== undefined;
  const cursor = await source.cursor(blockRange(store, plan, plan.firstRow).byte);
  const buffers = [newBuffer(plan), newBuffer(plan)];
  const read = (row: number, k: number) => {
    const range = blockRange(store, plan, row);
    const reading = readRange(source, cursor, store, plan, range, buffers[k % 2]!);
    // Rejections are met where the block is awaited; an iterator that is left early must not leave one unhandled.
    reading.catch(() => {});
    return reading;
  };
  let pending = read(plan.firstRow, 0);
  try {
    for (let row = plan.firstRow, k = 0; row < plan.endRow; row += plan.blockRows, k++) {
      const bytes = await pending;
      const range = blockRange(store, plan, row);
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

/** Piece by piece when most of each row is skipped, else in one read. */
async function readRange(
  source: ByteSource,
  cursor: Cursor,
  store: RowStore,
  plan: ReadPlan,
  range: BlockRange,
  buffer: Uint8Array,
): Promise<Uint8Array> {
  const bytes = buffer.subarray(0, range.rows * plan.rowBytes);
  if (!plan.scattered) {
    requireAll(store, range, await cursor.read(bytes, range.byte), bytes.length);
    return bytes;
  }
  const readRow = async (row: number) => {
    let at = row * plan.rowBytes;
    for (const { offset, bytes: length } of plan.pieces) {
      const part = bytes.subarray(at, at + length);
      const got = await cursor.read(part, range.byte + row * store.rowBytes + offset);
      requireAll(store, { ...range, firstRow: range.firstRow + row }, got, length);
      at += length;
    }
  };
  const together = source.sequential ? 1 : 32;
  for (let row = 0; row < range.rows; row += together) {
    const count = Math.min(together, range.rows - row);
    await Promise.all(Array.from({ length: count }, (_, k) => readRow(row + k)));
  }
  return bytes;
}

/** The size was right when the file was opened. */
function requireAll(store: RowStore, range: BlockRange, got: number, expected: number): void {
  if (got === expected) return;
  throw new InputError(
    `the file now ends at byte ${range.byte + got}: expected ${expected} bytes of ${store.word} ${range.firstRow + 1} ` +
      "and after",
    { ...store.place, byte: range.byte },
    "The file became shorter while it was read: wait until it is written",
  );
}

/** A function that turns the bytes of a range into the one block that it fills again and again. */
function blockDecoder(
  reader: RowReader,
  plan: ReadPlan,
  request: BlockRequest,
): (bytes: Uint8Array, range: BlockRange) => SampleBlock {
  const { store, samples } = reader;
  const block = newBlock(plan.blockRows, samples.shape, request.want);
  const scratch = new Float64Array(plan.blockRows);
  const moved = (offset: number) => placeInPieces(plan.pieces, offset);
  const context = { ...reader.context, columns: movedColumns(reader.context.columns, moved) };
  const fill = sampleFiller(reader, plan, request.want, scratch, moved);
  return (bytes, range) => {
    const raw: RawRows = {
      view: new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength),
      rows: range.rows,
      stride: plan.rowBytes,
      firstRow: range.firstRow,
      place: store.place,
      byte: range.byte,
      rowBytes: store.rowBytes,
    };
    block.firstRow = range.firstRow;
    block.rows = range.rows;
    fillRows(raw, context, scratch, block);
    fill(raw, block);
    return block;
  };
}

function sampleFiller(
  { samples: stored, weights }: RowReader,
  plan: ReadPlan,
  want: BlockRequest["want"],
  scratch: Float64Array,
  moved: (offset: number) => number,
): (raw: RawRows, block: SampleBlock) => void {
  if (want === "rows") return () => {};
  const readsArray = want === "samples" || stored.hasWeight || stored.blank !== undefined;
  const samples = readsArray ? { ...stored, rowBytes: plan.rowBytes, start: moved(stored.start) } : stored;
  if (isPlainFloat(samples)) {
    return want === "samples"
      ? (raw, block) => fillPlainSamples(raw.view, raw.rows, samples, block)
      : (raw, block) => fillPlainWeights(raw.view, raw.rows, samples, block.weight);
  }
  if (samples.hasWeight) {
    return (raw, block) =>
      fillScaledSamples(raw.view, raw.rows, samples, undefined, block, want === "samples");
  }
  const factors = newFactors(weights, plan.blockRows);
  const fillFactors = factorFiller(weights, factors, scratch, moved);
  const plain = weights.scale === undefined && isPlainPairs(samples);
  return (raw, block) => {
    fillFactors(raw);
    if (want === "samples" && plain) fillPlainPairs(raw.view, raw.rows, samples, block);
    if (plain || !readsArray) {
      fillFactorWeights(raw.rows, samples.shape, factors, block.weight);
    } else {
      fillScaledSamples(raw.view, raw.rows, samples, factors, block, want === "samples");
    }
  };
}

function newFactors({ weights, subbandStep, polarizationStep }: WeightColumns, rows: number): RowFactors {
  const perRow = Math.max(1, weights.length);
  return {
    weight: new Float64Array(rows * perRow).fill(1),
    perRow,
    subbandStep,
    polarizationStep,
    scale: new Float64Array(rows).fill(1),
  };
}

function factorFiller(
  columns: WeightColumns,
  factors: RowFactors,
  scratch: Float64Array,
  moved: (offset: number) => number,
): (raw: RawRows) => void {
  const weights = columns.weights.map((sum) => movedSum(sum, moved));
  const scale = columns.scale === undefined ? undefined : movedSum(columns.scale, moved);
  const { weight, perRow } = factors;
  return (raw) => {
    weights.forEach((sum, k) => {
      fillSum(raw, sum, scratch);
      for (let row = 0; row < raw.rows; row++) weight[row * perRow + k] = scratch[row]!;
    });
    if (scale !== undefined) fillSum(raw, scale, factors.scale);
  };
}
