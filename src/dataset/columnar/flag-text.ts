/** A CSV or TSV file copied record by record: the cells of flags or weights change, every other byte stays. */
import type { ByteSink } from "../../util/byte-sink.ts";
import { InputError } from "../../util/errors.ts";
import { openSource } from "../fits/source.ts";
import { delimiterOf, headerLine } from "./delimiter.ts";
import type { PlacedBatch } from "./flag-placer.ts";
import { type FlagWay, TextFlagger } from "./flagged-cell.ts";

const CHUNK_BYTES = 256 * 1024;

/** @param column name of the one that changes */
export async function copyFlaggingText(
  path: string,
  column: string,
  way: FlagWay,
  batches: AsyncIterable<PlacedBatch>,
  sink: ByteSink,
): Promise<void> {
  const records = recordsOf(path);
  try {
    await copyRecords(path, records, column, new TextFlagger(way), batches, sink);
  } finally {
    await records.return(undefined);
  }
}

async function copyRecords(
  path: string,
  records: AsyncGenerator<RawRecord | Passed>,
  column: string,
  flagger: TextFlagger,
  batches: AsyncIterable<PlacedBatch>,
  sink: ByteSink,
): Promise<void> {
  const pending: string[] = [];
  const flush = async () => {
    await sink.write(Buffer.from(pending.join(""), "latin1"));
    pending.length = 0;
  };
  const next = async (): Promise<RawRecord> => {
    for (;;) {
      const { value, done } = await records.next();
      if (done === true) throw changedMeanwhile(path);
      if (value.fields !== undefined) return value as RawRecord;
      pending.push(value.text);
    }
  };
  const header = await next();
  const names = header.fields.map(([from, to]) => unquoted(header.text.slice(from, to)));
  const at = names.findIndex((name) => Buffer.from(name, "latin1").toString("utf8").trim() === column);
  if (at < 0) throw changedMeanwhile(path);
  pending.push(header.text);
  for await (const { batch, length, taken } of batches) {
    for (let row = 0; row < batch.rows; row++) {
      const record = await next();
      const field = record.fields[at];
      if (field === undefined) throw changedMeanwhile(path);
      pending.push(edited(record.text, field, flagger, taken.subarray(row * length, (row + 1) * length)));
    }
    await flush();
  }
  for (;;) {
    const { value, done } = await records.next();
    if (done === true) break;
    pending.push(value.text);
  }
  await flush();
}

function edited(text: string, [from, to]: Field, flagger: TextFlagger, taken: Uint8Array): string {
  const cell = text.slice(from, to);
  const quoted = cell.length >= 2 && cell.startsWith('"') && cell.endsWith('"');
  const inner = quoted ? cell.slice(1, -1) : cell;
  const changed = flagger.edit(inner, taken);
  if (changed === inner) return text;
  return text.slice(0, from) + (quoted ? `"${changed}"` : changed) + text.slice(to);
}

function unquoted(cell: string): string {
  return cell.startsWith('"') ? cell.slice(1, -1).replaceAll('""', '"') : cell;
}

function changedMeanwhile(file: string): InputError {
  return new InputError(
    "the table has other lines than when it was read",
    { file },
    "It changed meanwhile: wait until it is written",
  );
}

/** Start and end of a cell in its record, quotes included. */
type Field = readonly [number, number];

interface RawRecord {
  /** one character a byte, with the end of its line */
  readonly text: string;
  readonly fields: readonly Field[];
}

/** What is no record: an empty line, a comment. */
interface Passed {
  readonly text: string;
  readonly fields: undefined;
}

async function* recordsOf(path: string): AsyncGenerator<RawRecord | Passed> {
  const source = await openSource(path);
  const cursor = await source.cursor();
  try {
    let text = "";
    let position = 0;
    let delimiter: string | undefined;
    let lineEnd: string | undefined;
    for (let ended = false; !ended; ) {
      const chunk = new Uint8Array(CHUNK_BYTES);
      const got = await cursor.read(chunk, position);
      position += got;
      ended = got < chunk.length;
      text += Buffer.from(chunk.buffer, 0, got).toString("latin1");
      if (delimiter === undefined) {
        delimiter = delimiterOf(headerLine(chunk.subarray(0, got)) ?? "") ?? ",";
        // A mark of the byte order stands before the first name, and is no part of it.
        if (text.startsWith("\u00ef\u00bb\u00bf")) {
          yield { text: text.slice(0, 3), fields: undefined };
          text = text.slice(3);
        }
        lineEnd = /\r\n|\n|\r/.exec(text)?.[0] ?? "\n";
      }
      let at = 0;
      for (;;) {
        const record = scan(text, at, delimiter, lineEnd!, ended);
        if (record === undefined) break;
        at += record.text.length;
        yield record;
      }
      text = text.slice(at);
    }
  } finally {
    await cursor.close();
  }
}

/** The record, comment or empty line at `start`; undefined where its end is not there yet, or nothing is left. */
function scan(
  text: string,
  start: number,
  delimiter: string,
  lineEnd: string,
  ended: boolean,
): RawRecord | Passed | undefined {
  if (start >= text.length) return undefined;
  if (text.startsWith(lineEnd, start)) return { text: lineEnd, fields: undefined };
  if (text[start] === "#") {
    const end = text.indexOf(lineEnd, start);
    if (end < 0 && !ended) return undefined;
    return { text: text.slice(start, end < 0 ? text.length : end + lineEnd.length), fields: undefined };
  }
  const fields: Field[] = [];
  let from = start;
  let at = start;
  let quoted = false;
  for (; at < text.length; at++) {
    const character = text[at];
    // Two quotes in a row leave and enter again, which comes to the same.
    if (character === '"' && (quoted || at === from)) quoted = !quoted;
    else if (!quoted && character === '"' && text[at - 1] === '"') quoted = true;
    else if (quoted) continue;
    else if (character === delimiter) {
      fields.push([from - start, at - start]);
      from = at + 1;
    } else if (text.startsWith(lineEnd, at)) {
      fields.push([from - start, at - start]);
      return { text: text.slice(start, at + lineEnd.length), fields };
    }
  }
  if (!ended) return undefined;
  fields.push([from - start, at - start]);
  return { text: text.slice(start), fields };
}
