/** A copy of a FITS file with a table added at its end: every byte before it is as it was. */
import type { ByteSink } from "../../util/byte-sink.ts";
import { CannotHoldFlags } from "../cannot-hold.ts";
import { copyBytes } from "./copy.ts";
import type { FitsFile } from "./hdus.ts";
import { BLOCK } from "./write-header.ts";

/** @throws CannotHoldFlags where something that is no table follows the last one */
export async function copyWithTable(file: FitsFile, table: Uint8Array, sink: ByteSink): Promise<void> {
  const last = file.hdus.at(-1)!;
  const end = Math.ceil((last.dataStart + last.dataBytes) / BLOCK) * BLOCK;
  const cursor = await file.source.cursor();
  try {
    const reached = await copyBytes(cursor, sink, 0, end);
    // Some writers leave out the last padding, without which no table may follow.
    await sink.write(new Uint8Array(end - reached));
    if ((await cursor.reach(end + 1)) > end) {
      throw new CannotHoldFlags(
        `bytes from ${end} on belong to no table, and a table after them would not be found`,
        "Cut the file there, or put the flags into the weights",
      );
    }
    await sink.write(table);
  } finally {
    await cursor.close();
  }
}
