/** A CSV or TSV file as a table, read as a stream: no more than a record at a time is ever held as text. */
import { Readable } from "node:stream";
import { CsvError, type Options, parse } from "csv-parse";
import { InputError } from "../../util/errors.ts";
import type { ByteSource } from "../fits/byte-source.ts";
import { delimiterOf, headerLine } from "./delimiter.ts";
import { BATCH_VALUES, type Batch, MOST_COLUMNS, type Table, type TableColumn } from "./table.ts";

/** A longer record is a quote that was never closed, or no table. */
const MOST_RECORD_BYTES = 16 * 1024 * 1024;
const CHUNK_BYTES = 256 * 1024;
const HEAD_BYTES = 64 * 1024;
/** Rows that are looked at to tell what a column holds. */
const SNIFFED_ROWS = 200;
const MOST_BATCH_ROWS = 8192;

/** @throws InputError when there is no header of column names */
export async function openText(source: ByteSource): Promise<Table> {
  const { path, bytesOnDisk } = source;
  const head = await headOf(source);
  const line = headerLine(head) ?? "";
  const delimiter = delimiterOf(line) ?? ",";
  // Known before the line is read whole.
  refuseWide(line.split(delimiter).length, path);
  let names: readonly string[] | undefined;
  const rows: string[][] = [];
  for await (const record of recordsOf(source, delimiter)) {
    if (names === undefined) names = headerNames(record, path);
    else rows.push(record);
    if (rows.length >= SNIFFED_ROWS) break;
  }
  if (names === undefined) throw new InputError("there is no line of column names", { file: path });
  const header = names;
  return {
    file: path,
    format: "text",
    bytes: bytesOnDisk,
    columns: header.map((name, i): TableColumn => ({ name, kind: sniff(rows.map((row) => row[i] ?? "")) })),
    mapText: undefined,
    batches: (columns) => readBatches(source, delimiter, header, columns),
  };
}

async function headOf(source: ByteSource): Promise<Uint8Array> {
  const cursor = await source.cursor();
  try {
    const head = new Uint8Array(HEAD_BYTES);
    return head.subarray(0, await cursor.read(head, 0));
  } finally {
    await cursor.close();
  }
}

function headerNames(record: readonly string[], file: string): string[] {
  const names = record.map((name) => name.trim());
  refuseWide(names.length, file);
  if (names.every((name) => name !== "" && Number.isFinite(Number(name)))) {
    throw new InputError(
      "the first line holds numbers: expected the names of the columns",
      { file, line: 1 },
      "Put a line of names before the first row",
    );
  }
  const twice = names.find((name, i) => name !== "" && names.indexOf(name) !== i);
  if (twice !== undefined) {
    throw new InputError(
      `two columns are called "${twice}"`,
      { file, line: 1 },
      "Give each a name of its own",
    );
  }
  return names;
}

function refuseWide(columns: number, file: string): void {
  if (columns <= MOST_COLUMNS) return;
  throw new InputError(
    `the line of names has ${columns} columns or more: expected at most ${MOST_COLUMNS}`,
    { file, line: 1 },
    "Take the columns that hold visibilities alone",
  );
}

function sniff(cells: readonly string[]): TableColumn["kind"] {
  const filled = cells.map((cell) => cell.trim()).filter((cell) => cell !== "");
  if (filled.length > 0 && filled.every((cell) => cell.startsWith("["))) return "list";
  if (filled.length > 0 && filled.every((cell) => /^(true|false)$/i.test(cell))) return "boolean";
  const numeric = filled.every((cell) => /^(nan|null|na)$/i.test(cell) || Number.isFinite(Number(cell)));
  return filled.length > 0 && numeric ? "number" : "text";
}

async function* readBatches(
  source: ByteSource,
  delimiter: string,
  header: readonly string[],
  columns: readonly string[],
): AsyncGenerator<Batch> {
  const places = new Map(columns.map((name) => [name, header.indexOf(name)]));
  let rows: string[][] = [];
  let characters = 0;
  let firstRow = -1;
  const batch = (): Batch => {
    const records = rows;
    const first = firstRow;
    rows = [];
    characters = 0;
    firstRow += records.length;
    return {
      firstRow: first,
      rows: records.length,
      column: (name) => records.map((record) => record[places.get(name)!]!),
    };
  };
  for await (const record of recordsOf(source, delimiter)) {
    if (firstRow < 0) {
      firstRow = 0;
      continue;
    }
    rows.push(record);
    for (const cell of record) characters += cell.length;
    if (rows.length >= MOST_BATCH_ROWS || characters > 4 * BATCH_VALUES) yield batch();
  }
  if (rows.length > 0) yield batch();
}

/** Records with as many fields as the header. @throws InputError at the line that is malformed */
async function* recordsOf(source: ByteSource, delimiter: string): AsyncGenerator<string[]> {
  const options: Options = {
    delimiter,
    bom: true,
    comment: "#",
    comment_no_infix: true,
    skip_empty_lines: true,
    max_record_size: MOST_RECORD_BYTES,
  };
  const parser = parse(options);
  const input = Readable.from(chunksOf(source), { objectMode: false });
  input.on("error", (error) => parser.destroy(error));
  try {
    for await (const record of input.pipe(parser)) yield record as string[];
  } catch (cause) {
    throw malformed(cause, source.path);
  } finally {
    input.destroy();
    parser.destroy();
  }
}

async function* chunksOf(source: ByteSource): AsyncGenerator<Uint8Array> {
  const cursor = await source.cursor();
  try {
    for (let at = 0; ; ) {
      const chunk = new Uint8Array(CHUNK_BYTES);
      const got = await cursor.read(chunk, at);
      if (got > 0) yield chunk.subarray(0, got);
      if (got < CHUNK_BYTES) return;
      at += got;
    }
  } finally {
    await cursor.close();
  }
}

function malformed(cause: unknown, file: string): unknown {
  if (!(cause instanceof CsvError)) return cause;
  const line = typeof cause.lines === "number" ? cause.lines : undefined;
  const place = line === undefined ? { file } : { file, line };
  switch (cause.code) {
    case "CSV_MAX_RECORD_SIZE":
      return new InputError(
        `a record is longer than ${MOST_RECORD_BYTES} bytes`,
        place,
        "A quote is probably not closed, or the lines have no ends",
        { cause },
      );
    case "CSV_RECORD_INCONSISTENT_FIELDS_LENGTH":
    case "CSV_RECORD_INCONSISTENT_COLUMNS": {
      const found = Array.isArray(cause.record) ? cause.record.length : "another number of";
      return new InputError(`the record has ${found} fields, unlike the line of names`, place, undefined, {
        cause,
      });
    }
    case "CSV_QUOTE_NOT_CLOSED":
      return new InputError("a quote is not closed before the file ends", place, undefined, { cause });
    default:
      return new InputError(`this is not CSV: ${cause.message}`, place, undefined, { cause });
  }
}
