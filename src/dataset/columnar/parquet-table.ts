/** A Parquet file as a table: its footer first, then row groups by byte range, never the whole file. */
import { brotliDecompressSync, gunzipSync } from "node:zlib";
import {
  type AsyncBuffer,
  type FileMetaData,
  parquetMetadataAsync,
  parquetScan,
  parquetSchema,
} from "hyparquet";
import { compressors as everyCompressor } from "hyparquet-compressors";
import { InputError } from "../../util/errors.ts";
import type { ByteSource, Cursor } from "../fits/byte-source.ts";
import { type Batch, type ColumnKind, MAP_KEY, MOST_COLUMNS, type Table, type TableColumn } from "./table.ts";

/** Node's own where it has them. A page unpacks to what its header says, and no more. */
const compressors: typeof everyCompressor = {
  ...everyCompressor,
  GZIP: (packed, maxOutputLength) => gunzipSync(packed, { maxOutputLength }),
  BROTLI: (packed, maxOutputLength) => brotliDecompressSync(packed, { maxOutputLength }),
};

/** A row group of these columns is unpacked at once where it has no page index. */
const MOST_GROUP_BYTES = 512 * 1024 * 1024;
/** With a page index a large group is read a piece at a time. */
const PIECE_BYTES = 32 * 1024 * 1024;
const MOST_FOOTER_BYTES = 256 * 1024 * 1024;

/** Timestamps keep their microseconds as unix seconds; the reader's own dates would cut them to milliseconds. */
const parsers = {
  timestampFromMilliseconds: (ms: bigint) => Number(ms) / 1e3,
  timestampFromMicroseconds: (us: bigint) => Number(us) / 1e6,
  timestampFromNanoseconds: (ns: bigint) => Number(ns) / 1e9,
};

/** @throws InputError when the footer is damaged */
export async function openParquet(source: ByteSource): Promise<Table> {
  const { path, bytesOnDisk } = source;
  const damaged = (cause: unknown, row?: number) => damage(path, cause, row);
  if (source.sequential) {
    const advice = "Unpack it first: gunzip keeps the table as it is";
    throw new InputError("this Parquet file is packed with gzip as a whole", { file: path }, advice);
  }
  const metadata = await withCursor(source, async (cursor) => {
    await requireFooter(cursor, path, bytesOnDisk);
    return parquetMetadataAsync(bufferOf(cursor, bytesOnDisk), { geoparquet: false }).catch(
      (cause: unknown) => {
        throw damaged(cause);
      },
    );
  });
  const mapText = metadata.key_value_metadata?.find(({ key }) => key === MAP_KEY)?.value;
  return {
    file: path,
    format: "parquet",
    bytes: bytesOnDisk,
    columns: columnsOf(metadata, path),
    mapText,
    batches: (columns) => readBatches(source, metadata, columns),
  };
}

async function withCursor<T>(source: ByteSource, use: (cursor: Cursor) => Promise<T>): Promise<T> {
  const cursor = await source.cursor();
  try {
    return await use(cursor);
  } finally {
    await cursor.close();
  }
}

function bufferOf(cursor: Cursor, byteLength: number): AsyncBuffer {
  return {
    byteLength,
    slice: async (start, end = byteLength) => {
      const bytes = new Uint8Array(Math.max(0, Math.min(end, byteLength) - start));
      const got = await cursor.read(bytes, start);
      if (got !== bytes.length) throw new Error(`the file ends at byte ${start + got}`);
      return bytes.buffer;
    },
  };
}

/** The length of the footer stands before the last four bytes: it must lie inside the file. */
async function requireFooter(cursor: Cursor, file: string, bytes: number): Promise<void> {
  const tail = new Uint8Array(8);
  if (bytes >= 12) await cursor.read(tail, bytes - 8);
  const footer = new DataView(tail.buffer).getUint32(0, true);
  const marked = Buffer.from(tail.subarray(4)).toString("latin1") === "PAR1";
  if (marked && footer <= Math.min(bytes - 12, MOST_FOOTER_BYTES)) return;
  throw new InputError(
    marked
      ? `the footer claims ${footer} bytes of a file of ${bytes}`
      : "the file does not end with a Parquet footer (PAR1)",
    { file, byte: Math.max(0, bytes - 8) },
    "The copy is probably incomplete: compare its size with the original and copy it again",
  );
}

function columnsOf(metadata: FileMetaData, file: string): TableColumn[] {
  const { children } = parquetSchema(metadata);
  if (children.length > MOST_COLUMNS) {
    throw new InputError(`the table has ${children.length} columns: expected at most ${MOST_COLUMNS}`, {
      file,
    });
  }
  return children.map(({ element, children: inner }): TableColumn => {
    const list =
      element.repetition_type === "REPEATED" ||
      element.converted_type === "LIST" ||
      element.logical_type?.type === "LIST";
    const kind = list ? "list" : inner.length > 0 ? "other" : kindOf(element);
    return { name: element.name, kind };
  });
}

function kindOf(element: FileMetaData["schema"][number]): ColumnKind {
  const { type, converted_type: converted, logical_type: logical } = element;
  if (type === "INT96" || logical?.type === "TIMESTAMP" || converted?.startsWith("TIMESTAMP") === true) {
    return "timestamp";
  }
  if (type === "BOOLEAN") return "boolean";
  if (type === "BYTE_ARRAY" || type === "FIXED_LEN_BYTE_ARRAY") {
    return converted === "DECIMAL" || logical?.type === "FLOAT16" ? "number" : "text";
  }
  return "number";
}

/** Bytes of a row group's chosen columns when unpacked, and whether all have a page index. */
function groupSize(group: FileMetaData["row_groups"][number], columns: ReadonlySet<string>) {
  let bytes = 0;
  let indexed = true;
  for (const { meta_data: chunk, offset_index_offset: index } of group.columns) {
    if (chunk === undefined || !columns.has(chunk.path_in_schema[0]!)) continue;
    bytes += Number(chunk.total_uncompressed_size);
    indexed &&= index !== undefined;
  }
  return { bytes, indexed };
}

async function* readBatches(
  source: ByteSource,
  metadata: FileMetaData,
  columns: readonly string[],
): AsyncGenerator<Batch> {
  const cursor = await source.cursor();
  const wanted = new Set(columns);
  const file = bufferOf(cursor, source.bytesOnDisk);
  try {
    let groupStart = 0;
    for (const [index, group] of metadata.row_groups.entries()) {
      const rows = Number(group.num_rows);
      const { bytes, indexed } = groupSize(group, wanted);
      if (!indexed && bytes > MOST_GROUP_BYTES) {
        throw new InputError(
          `row group ${index + 1} unpacks to ${bytes} bytes of the columns wanted, without a page index: expected at ` +
            `most ${MOST_GROUP_BYTES}`,
          { file: source.path, row: groupStart + 1 },
          "Write the table again with smaller row groups",
        );
      }
      const pieces = indexed ? Math.max(1, Math.min(rows, Math.ceil(bytes / PIECE_BYTES))) : 1;
      const step = Math.max(1, Math.ceil(rows / pieces));
      for (let from = 0; from < rows; from += step) {
        const range = { rowStart: groupStart + from, rowEnd: groupStart + Math.min(rows, from + step) };
        yield await readPiece(file, metadata, [...wanted], range, source.path);
      }
      groupStart += rows;
    }
  } finally {
    await cursor.close();
  }
}

async function readPiece(
  file: AsyncBuffer,
  metadata: FileMetaData,
  columns: string[],
  range: { rowStart: number; rowEnd: number },
  path: string,
): Promise<Batch> {
  const rows = range.rowEnd - range.rowStart;
  const read = new Map<string, ArrayLike<unknown>>();
  try {
    // A scan of its own for every piece: it would keep the columns of the last one.
    const scan = await parquetScan({ file, metadata, columns, compressors, parsers, geoparquet: false });
    for (const column of columns) {
      const values = await scan.readColumn({ column, ...range });
      if (values.length !== rows) {
        throw new Error(`column ${column} gives ${values.length} values, the row group has ${rows} rows`);
      }
      read.set(column, values);
    }
  } catch (cause) {
    throw damage(path, cause, range.rowStart + 1);
  }
  return { firstRow: range.rowStart, rows, column: (name) => read.get(name)! };
}

function damage(file: string, cause: unknown, row?: number): InputError {
  if (cause instanceof InputError) return cause;
  const why = cause instanceof Error ? cause.message : String(cause);
  return new InputError(
    `the Parquet file is damaged, or of a kind that cannot be read: ${why}`,
    row === undefined ? { file } : { file, row },
    "Copy it again, or write it with another program",
    { cause },
  );
}
