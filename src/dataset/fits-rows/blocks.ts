/** The rows of a file in blocks. */
import { Arena } from "../../util/kernels/memory.ts";
import type { BlockRequest, SampleBlock } from "../dataset.ts";
import type { ByteSource } from "../fits/byte-source.ts";
import { newBlock } from "../new-block.ts";
import type { TableFlags } from "../table-flags.ts";
import { Chunks } from "./chunks.ts";
import { movedColumns, movedSum, type WeightColumns } from "./columns.ts";
import { fillPairs, fillSamples, fillWeights } from "./kernel-samples.ts";
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
  const arena = new Arena();
  const decode = blockDecoder(reader, plan, request, arena);
  const laysFlags = request.want !== "rows" && flags !== undefined;
  const cursor = await source.cursor(blockRange(store, plan, plan.firstRow).byte);
  const chunks = new Chunks(source, cursor, store, plan, arena);
  try {
    for (let first = plan.firstRow; first < plan.endRow; first += chunks.rows) {
      const read = chunks.read(first);
      const bytes = read instanceof Promise ? await read : read;
      const end = Math.min(plan.endRow, first + chunks.rows);
      for (let row = first; row < end; row += plan.blockRows) {
        const at = (row - first) * plan.rowBytes;
        const block = decode(bytes.subarray(at), blockRange(store, plan, row));
        if (laysFlags) flags.apply(block, samples.shape);
        yield block;
      }
    }
  } finally {
    await chunks.settle();
    await cursor.close();
    arena.release();
  }
}

/** A function that turns the bytes of a range into the one block that it fills again and again. */
function blockDecoder(
  reader: RowReader,
  plan: ReadPlan,
  request: BlockRequest,
  arena: Arena,
): (bytes: Uint8Array, range: BlockRange) => SampleBlock {
  const { store, samples } = reader;
  const block = newBlock(plan.blockRows, samples.shape, request.want, arena);
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
      ? (raw, block) => fillSamples(raw.view, raw.rows, samples, block)
      : (raw, block) => fillWeights(raw.view, raw.rows, samples, block.weight);
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
    if (want === "samples" && plain) fillPairs(raw.view, raw.rows, samples, block);
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
