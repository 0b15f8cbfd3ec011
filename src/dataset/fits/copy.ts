/** Bytes of a file as they are, into a copy. */
import type { ByteSink } from "../../util/byte-sink.ts";
import type { Cursor } from "./byte-source.ts";

const CHUNK = 1024 * 1024;

/** @param to one past the last byte; Infinity: to the end. @returns the byte reached */
export async function copyBytes(cursor: Cursor, sink: ByteSink, from: number, to: number): Promise<number> {
  const buffer = new Uint8Array(Math.min(CHUNK, Math.max(0, to - from)));
  let at = from;
  while (at < to) {
    const part = buffer.subarray(0, Math.min(buffer.length, to - at));
    const got = await cursor.read(part, at);
    await sink.write(part.subarray(0, got));
    at += got;
    if (got < part.length) break;
  }
  return at;
}
