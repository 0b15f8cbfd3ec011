/** An Arrow IPC file or stream as a table: one record batch at a time. */
import { type FileHandle, open } from "node:fs/promises";
import {
  type AsyncRecordBatchFileReader,
  type AsyncRecordBatchStreamReader,
  CompressionType,
  compressionRegistry,
  DataType,
  type Field,
  type RecordBatch,
  RecordBatchReader,
  type Vector,
} from "apache-arrow";
import { decompressZstd } from "hyparquet-compressors";
import { InputError } from "../../util/errors.ts";
import type { ByteSource } from "../fits/byte-source.ts";
import { type Batch, type ColumnKind, MAP_KEY, MOST_COLUMNS, type Table, type TableColumn } from "./table.ts";

/** A record batch is read at once: the format has no smaller part. */
const MOST_BATCH_BYTES = 1024 * 1024 * 1024;

// LZ4 frames link their blocks, which no library at hand unpacks: they are refused below.
if (compressionRegistry.get(CompressionType.ZSTD) === null) {
  compressionRegistry.set(CompressionType.ZSTD, { decode: (packed) => decompressZstd(packed) });
}

type Reader = AsyncRecordBatchFileReader | AsyncRecordBatchStreamReader;

/** @throws InputError when the schema cannot be read */
export async function openArrow(source: ByteSource): Promise<Table> {
  const { path, bytesOnDisk } = source;
  if (source.sequential) {
    const advice = "Unpack it first: gunzip keeps the table as it is";
    throw new InputError("this Arrow file is packed with gzip as a whole", { file: path }, advice);
  }
  return withReader(path, async (reader) => {
    const { fields, metadata } = reader.schema;
    if (fields.length > MOST_COLUMNS) {
      throw new InputError(`the table has ${fields.length} columns: expected at most ${MOST_COLUMNS}`, {
        file: path,
      });
    }
    return {
      file: path,
      format: "arrow",
      bytes: bytesOnDisk,
      columns: fields.map((field): TableColumn => ({ name: field.name, kind: kindOf(field) })),
      mapText: metadata.get(MAP_KEY),
      batches: (columns) => readBatches(path, columns),
    };
  });
}

async function withReader<T>(path: string, use: (reader: Reader) => Promise<T>): Promise<T> {
  const handle = await open(path);
  try {
    return await use(await openReader(handle, path));
  } finally {
    await handle.close().catch(() => {});
  }
}

async function openReader(handle: FileHandle, path: string): Promise<Reader> {
  try {
    const reader = (await RecordBatchReader.from(handle)) as Reader;
    await reader.open();
    if (reader.schema === undefined) throw new Error("there is no schema");
    if (reader.isFile()) refuseHugeBatches(reader, path);
    return reader;
  } catch (cause) {
    throw damage(path, cause);
  }
}

/** The footer says how large every batch is before any is read. */
function refuseHugeBatches(reader: Reader, file: string): void {
  let index = 0;
  for (const { bodyLength } of reader.footer?.recordBatches() ?? []) {
    index += 1;
    if (bodyLength <= MOST_BATCH_BYTES) continue;
    throw new InputError(
      `record batch ${index} is of ${bodyLength} bytes: expected at most ${MOST_BATCH_BYTES}`,
      { file },
      "Write the table again in smaller record batches",
    );
  }
}

function kindOf({ type }: Field): ColumnKind {
  const inner = DataType.isDictionary(type) ? type.dictionary : type;
  if (DataType.isInt(inner) || DataType.isFloat(inner)) return "number";
  if (DataType.isUtf8(inner) || DataType.isLargeUtf8(inner) || DataType.isUtf8View(inner)) return "text";
  if (DataType.isBool(inner)) return "boolean";
  if (DataType.isTimestamp(inner) || DataType.isDate(inner)) return "timestamp";
  return isList(inner) ? "list" : "other";
}

function isList(type: DataType): boolean {
  return DataType.isList(type) || DataType.isLargeList(type) || DataType.isFixedSizeList(type);
}

async function* readBatches(path: string, columns: readonly string[]): AsyncGenerator<Batch> {
  const handle = await open(path);
  try {
    const reader = await openReader(handle, path);
    let firstRow = 0;
    for (;;) {
      let next: IteratorResult<RecordBatch>;
      try {
        next = (await reader.next()) as IteratorResult<RecordBatch>;
      } catch (cause) {
        throw damage(path, cause, firstRow + 1);
      }
      if (next.done === true) return;
      const batch = next.value;
      if (batch.numRows === 0) continue;
      yield batchOf(batch, columns, firstRow, path);
      firstRow += batch.numRows;
    }
  } finally {
    await handle.close().catch(() => {});
  }
}

function batchOf(batch: RecordBatch, columns: readonly string[], firstRow: number, path: string): Batch {
  const read = new Map<string, ArrayLike<unknown>>();
  for (const name of columns) {
    const vector = batch.getChild(name);
    if (vector === null)
      throw damage(path, new Error(`the record batch has no column ${name}`), firstRow + 1);
    read.set(name, cellsOf(vector));
  }
  return { firstRow, rows: batch.numRows, column: (name) => read.get(name)! };
}

function cellsOf(vector: Vector): ArrayLike<unknown> {
  const { type, length, nullCount } = vector;
  if (nullCount === 0 && (DataType.isFloat(type) || DataType.isInt(type))) {
    // Half precision comes as its bits.
    if (!(DataType.isFloat(type) && type.precision === 0)) return vector.toArray() as ArrayLike<unknown>;
  }
  if (DataType.isTimestamp(type) || DataType.isDate(type)) {
    return Array.from({ length }, (_, i) => {
      const ms = vector.get(i) as number | bigint | null;
      return ms === null ? null : Number(ms) / 1e3;
    });
  }
  if (isList(type)) {
    return Array.from({ length }, (_, i) => {
      const inner = vector.get(i) as Vector | null;
      return inner === null ? null : cellsOf(inner);
    });
  }
  return Array.from({ length }, (_, i) => vector.get(i) as unknown);
}

function damage(file: string, cause: unknown, row?: number): InputError {
  if (cause instanceof InputError) return cause;
  const why = cause instanceof Error ? cause.message : String(cause);
  const place = row === undefined ? { file } : { file, row };
  if (/compressed but codec not found/.test(why)) {
    return new InputError(
      "the bodies of this Arrow file are compressed with LZ4, which is not read",
      place,
      "Write it uncompressed, with ZSTD, or as Parquet",
      { cause },
    );
  }
  return new InputError(
    `the Arrow file is damaged, or of a kind that cannot be read: ${why}`,
    place,
    "Copy it again, or write it with another program",
    { cause },
  );
}
