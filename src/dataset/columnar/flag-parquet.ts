/**
 * A Parquet file copied with one column changed. All of the file before its footer stays as it is; the column's new
 * chunks follow, and the footer after them points to them instead of the old ones. So every other cell is the same byte
 * for byte, whatever its type.
 */
import {
  type ColumnChunk,
  type FileMetaData,
  parquetMetadata,
  parquetMetadataAsync,
  parquetSchema,
  type SchemaElement,
} from "hyparquet";
import { ByteWriter, parquetWriteBuffer } from "hyparquet-writer";
import { writeMetadata } from "hyparquet-writer/src/metadata.js";
import type { ByteSink } from "../../util/byte-sink.ts";
import { CannotHoldFlags } from "../cannot-hold.ts";
import type { Cursor } from "../fits/byte-source.ts";
import { copyBytes } from "../fits/copy.ts";
import { openSource } from "../fits/source.ts";
import type { PlacedBatch } from "./flag-placer.ts";
import { type FlagWay, flaggedValue } from "./flagged-cell.ts";

/** The writer brings a reader of its own, whose types are the same but for how strictly they leave things out. */
type WriterSchema = NonNullable<Parameters<typeof parquetWriteBuffer>[0]["schema"]>;

/** @throws CannotHoldFlags when the column is of a type that cannot be written as it was */
export async function copyFlaggingParquet(
  path: string,
  column: string,
  way: FlagWay,
  batches: AsyncIterable<PlacedBatch>,
  sink: ByteSink,
): Promise<void> {
  const source = await openSource(path);
  const cursor = await source.cursor();
  const placed = batches[Symbol.asyncIterator]();
  try {
    const metadata = await parquetMetadataAsync(bufferOf(cursor, source.bytesOnDisk), { geoparquet: false });
    const elements = subtreeOf(metadata, column);
    requireType(elements, way);
    let at = await copyBytes(cursor, sink, 0, await footerStart(cursor, source.bytesOnDisk));
    for (const group of metadata.row_groups) {
      const values = await groupValues(placed, Number(group.num_rows), column, way);
      if (values.length === 0) continue;
      const { bytes, chunk } = chunkOf(column, elements, values);
      await sink.write(bytes);
      const old = group.columns.find(({ meta_data: one }) => one?.path_in_schema[0] === column)!;
      replaceChunk(old, chunk, at);
      at += bytes.length;
    }
    for (const group of metadata.row_groups) group.columns.forEach(dropUnsureStatistics(metadata));
    await sink.write(footerOf(metadata));
  } finally {
    await placed.return?.();
    await cursor.close();
  }
}

function bufferOf(cursor: Cursor, byteLength: number) {
  return {
    byteLength,
    slice: async (start: number, end = byteLength) => {
      const bytes = new Uint8Array(end - start);
      await cursor.read(bytes, start);
      return bytes.buffer;
    },
  };
}

/** The footer's length stands before the last four bytes. */
async function footerStart(cursor: Cursor, size: number): Promise<number> {
  const tail = new Uint8Array(8);
  await cursor.read(tail, size - 8);
  return size - 8 - new DataView(tail.buffer).getUint32(0, true);
}

/** The schema of one column, the column itself first. */
function subtreeOf(metadata: FileMetaData, column: string): SchemaElement[] {
  type Node = ReturnType<typeof parquetSchema>;
  const flat = ({ element, children }: Node): SchemaElement[] => [element, ...children.flatMap(flat)];
  const node = parquetSchema(metadata).children.find(({ element }) => element.name === column);
  return node === undefined ? [] : flat(node);
}

const PLAIN = ["BOOLEAN", "INT32", "INT64", "FLOAT", "DOUBLE"];
const WHOLE = /^(UINT|INT)_(8|16|32|64)$/;

function requireType(elements: readonly SchemaElement[], way: FlagWay): void {
  const leaf = elements.at(-1);
  const nested = elements.filter(({ num_children: children }) => (children ?? 0) > 0);
  const converted = leaf?.converted_type;
  const isText = leaf?.type === "BYTE_ARRAY" && converted === "UTF8";
  const isNumber = PLAIN.includes(leaf?.type ?? "") && (converted === undefined || WHOLE.test(converted));
  const unsigned = converted?.startsWith("UINT") === true || leaf?.type === "BOOLEAN";
  if (leaf !== undefined && nested.length <= 2 && (isText || isNumber) && !(way === "sign" && unsigned))
    return;
  const type = `${leaf?.type ?? "none"}${converted === undefined ? "" : ` (${converted})`}`;
  throw new CannotHoldFlags(`column "${elements[0]?.name ?? ""}" is of type ${type}`);
}

/** The column's values in a row group, with the samples taken flagged. */
async function groupValues(
  placed: AsyncIterator<PlacedBatch>,
  rows: number,
  column: string,
  way: FlagWay,
): Promise<unknown[]> {
  const values: unknown[] = [];
  while (values.length < rows) {
    const next = await placed.next();
    if (next.done === true) throw new RangeError(`${values.length} of ${rows} rows of a row group`);
    const { batch, length, taken } = next.value;
    const cells = batch.column(column);
    for (let row = 0; row < batch.rows; row++) {
      values.push(flaggedCell(cells[row], taken.subarray(row * length, (row + 1) * length), way));
    }
  }
  return values;
}

/** A value, or the list of a row's samples. */
export function flaggedCell(cell: unknown, taken: Uint8Array, way: FlagWay): unknown {
  if (Array.isArray(cell) || ArrayBuffer.isView(cell)) {
    const elements = Array.from(cell as unknown as ArrayLike<unknown>);
    return elements.map((one, i) => (taken[i] === 1 ? flaggedValue(one, way, true) : one));
  }
  if (!taken.includes(1)) return cell;
  if (taken.includes(0))
    throw new CannotHoldFlags("one value stands for all samples of a row, and some are taken");
  return flaggedValue(cell, way, true);
}

interface Chunk {
  readonly bytes: Uint8Array;
  /** offsets from the start of `bytes` */
  readonly chunk: NonNullable<ColumnChunk["meta_data"]>;
}

/** One row group of the column alone, as a file of its own, and its one chunk taken out of that. */
function chunkOf(column: string, elements: readonly SchemaElement[], values: unknown[]): Chunk {
  const whole = parquetWriteBuffer({
    columnData: [{ name: column, data: values }],
    schema: [{ name: "root", num_children: 1 }, ...elements] as WriterSchema,
    rowGroupSize: values.length,
    statistics: false,
  });
  const chunk = parquetMetadata(whole).row_groups[0]!.columns[0]!.meta_data!;
  const start = Number(chunk.dictionary_page_offset ?? chunk.data_page_offset);
  const bytes = new Uint8Array(whole, start, Number(chunk.total_compressed_size));
  const moved = (offset: bigint) => offset - BigInt(start);
  return {
    bytes,
    chunk: {
      ...chunk,
      data_page_offset: moved(chunk.data_page_offset),
      ...(chunk.dictionary_page_offset === undefined
        ? {}
        : { dictionary_page_offset: moved(chunk.dictionary_page_offset) }),
    },
  };
}

/** What indexes and filters the old chunk had is not true of the new one. */
function replaceChunk(old: ColumnChunk, chunk: Chunk["chunk"], at: number): void {
  const start = BigInt(at);
  old.file_offset = start;
  old.meta_data = {
    ...chunk,
    data_page_offset: chunk.data_page_offset + start,
    ...(chunk.dictionary_page_offset === undefined
      ? {}
      : { dictionary_page_offset: chunk.dictionary_page_offset + start }),
  };
  delete old.offset_index_offset;
  delete old.offset_index_length;
  delete old.column_index_offset;
  delete old.column_index_length;
}

/** Least and greatest values of types that do not come back from their reading bit by bit are left out. */
function dropUnsureStatistics(metadata: FileMetaData): (chunk: ColumnChunk) => void {
  const sure = new Set(
    metadata.schema
      .filter(({ type, converted_type: converted, logical_type: logical }) => {
        return PLAIN.includes(type ?? "") && converted === undefined && logical === undefined;
      })
      .map(({ name }) => name),
  );
  return ({ meta_data: chunk }) => {
    if (chunk === undefined) return;
    delete chunk.geospatial_statistics;
    if (!sure.has(chunk.path_in_schema.at(-1)!)) delete chunk.statistics;
  };
}

/** The footer, its length and the mark that ends the file. */
function footerOf(metadata: FileMetaData): Uint8Array {
  const writer = new ByteWriter();
  writeMetadata(writer, metadata as Parameters<typeof writeMetadata>[1]);
  // The writer adds the length of the footer; the mark is ours.
  writer.appendUint32(0x31524150);
  return writer.getBytes();
}
