/** Blocks of rows from the working copy of a table. */
import { type FileHandle, open } from "node:fs/promises";
import { join } from "node:path";
import type { BlockRequest, SampleBlock, Shape } from "../dataset.ts";
import { newBlock } from "../new-block.ts";
import { spoolError } from "./spool-file.ts";
import { ABSENT, ROW_BYTES, ROWS_FILE, SAMPLES_FILE } from "./spool-writer.ts";

/** A block's sample arrays stay under this, bytes. */
const MOST_BLOCK_BYTES = 16 * 1024 * 1024;
/** Without a wish: about what the second-level cache holds. */
const USUAL_BLOCK_BYTES = 1024 * 1024;
const MOST_BLOCK_ROWS = 65_536;

export interface SpooledRows {
  readonly folder: string;
  readonly rows: number;
  readonly shape: Shape;
  /** there are samples that never came */
  readonly gaps: boolean;
}

interface Range {
  readonly first: number;
  readonly end: number;
  readonly blockRows: number;
}

/** @throws RangeError for a request that makes no sense */
function planRange({ rows, shape }: SpooledRows, request: BlockRequest): Range {
  const [first, end] = request.rows ?? [0, rows];
  if (!(Number.isInteger(first) && Number.isInteger(end) && 0 <= first && first <= end && end <= rows)) {
    throw new RangeError(`rows ${first} to ${end}: the dataset has ${rows}`);
  }
  const wish = request.blockRows;
  if (wish !== undefined && !(Number.isInteger(wish) && wish >= 1)) {
    throw new RangeError(`blockRows is ${wish}: expected a whole number of 1 or more`);
  }
  const rowBytes =
    request.want === "rows" ? ROW_BYTES : 12 * shape.subbands * shape.channels * shape.polarizations;
  const most = Math.min(MOST_BLOCK_ROWS, Math.max(1, Math.floor(MOST_BLOCK_BYTES / rowBytes)));
  const usual = Math.max(1, Math.floor(USUAL_BLOCK_BYTES / rowBytes));
  return { first, end, blockRows: Math.min(wish ?? usual, most, Math.max(1, end - first)) };
}

export async function* spoolBlocks(spooled: SpooledRows, request: BlockRequest): AsyncGenerator<SampleBlock> {
  const { first, end, blockRows } = planRange(spooled, request);
  if (first === end) return;
  const { shape, folder } = spooled;
  const rowSamples = shape.subbands * shape.channels * shape.polarizations;
  const block = newBlock(blockRows, shape, request.want);
  const rowFile = await openPart(join(folder, ROWS_FILE));
  const sampleFile = request.want === "rows" ? undefined : await openPart(join(folder, SAMPLES_FILE));
  const records = new Uint8Array(blockRows * ROW_BYTES);
  const slots = new Float32Array(sampleFile === undefined ? 0 : blockRows * 3 * rowSamples);
  const slotBytes = new Uint8Array(slots.buffer);
  try {
    for (let row = first; row < end; row += blockRows) {
      const rows = Math.min(blockRows, end - row);
      block.firstRow = row;
      block.rows = rows;
      await readAt(rowFile, records.subarray(0, rows * ROW_BYTES), row * ROW_BYTES, folder);
      fillRows(records, block);
      if (sampleFile !== undefined) {
        const bytes = 12 * rowSamples;
        await readAt(sampleFile, slotBytes.subarray(0, rows * bytes), row * bytes, folder);
        fillSamples(slots, rowSamples, block, request.want === "samples");
        if (spooled.gaps) fillGaps(block, rows * rowSamples);
      }
      yield block;
    }
  } finally {
    await rowFile.close();
    await sampleFile?.close();
  }
}

async function openPart(path: string): Promise<FileHandle> {
  try {
    return await open(path);
  } catch (cause) {
    throw spoolError(path, cause);
  }
}

async function readAt(handle: FileHandle, into: Uint8Array, at: number, path: string): Promise<void> {
  for (let done = 0; done < into.length; ) {
    const { bytesRead } = await handle.read(into, done, into.length - done, at + done);
    if (bytesRead === 0) throw spoolError(path, new Error("it became shorter"));
    done += bytesRead;
  }
}

function fillRows(records: Uint8Array, block: SampleBlock): void {
  const doubles = new Float64Array(records.buffer);
  const integers = new Int32Array(records.buffer);
  const singles = new Float32Array(records.buffer);
  for (let row = 0; row < block.rows; row++) {
    const d = row * 7;
    const i = row * 14;
    block.time[row] = doubles[d]!;
    block.u[row] = doubles[d + 1]!;
    block.v[row] = doubles[d + 2]!;
    block.w[row] = doubles[d + 3]!;
    block.antenna1[row] = integers[i + 8]!;
    block.antenna2[row] = integers[i + 9]!;
    block.subarray[row] = integers[i + 10]!;
    block.field[row] = integers[i + 11]!;
    block.setup[row] = integers[i + 12]!;
    block.integration[row] = singles[i + 13]!;
  }
}

function fillSamples(slots: Float32Array, rowSamples: number, block: SampleBlock, values: boolean): void {
  for (let row = 0; row < block.rows; row++) {
    const from = row * 3 * rowSamples;
    const to = row * rowSamples;
    if (values) {
      block.real.set(slots.subarray(from, from + rowSamples), to);
      block.imag.set(slots.subarray(from + rowSamples, from + 2 * rowSamples), to);
    }
    block.weight.set(slots.subarray(from + 2 * rowSamples, from + 3 * rowSamples), to);
  }
}

/** A sample that never came is flagged: nothing is known of it. */
function fillGaps(block: SampleBlock, samples: number): void {
  const { weight } = block;
  const bits = new Uint32Array(weight.buffer, weight.byteOffset, weight.length);
  for (let i = 0; i < samples; i++) {
    if (bits[i] === ABSENT) weight[i] = 0;
  }
}
