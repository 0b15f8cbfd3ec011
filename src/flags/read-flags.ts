/** Flags from any file that `visvet check` writes them into, told by what is in it: JSON, CSV, Parquet, a FLAG table. */
import { open, stat } from "node:fs/promises";
import { InputError } from "../util/errors.ts";
import type { AcceptedFlags } from "./accepted.ts";
import { readFlagFile } from "./flag-file.ts";

const LARGEST_FILE = 256 * 1024 * 1024;
/** Some of the start of each kind is enough to tell it. */
const HEAD_BYTES = 64;

/** @throws InputError when it is none of these, or malformed; it says where */
export async function readFlags(path: string): Promise<AcceptedFlags> {
  const head = await headOf(path);
  if (head.startsWith("SIMPLE  =")) return (await import("./read-flag-fits.ts")).readFlagFits(path);
  if (head.startsWith("PAR1")) return (await import("./read-flag-table.ts")).readFlagParquet(path);
  // A byte order mark before it is no part of the text.
  if (/^(\u00ef\u00bb\u00bf)?\s*[{[]/.test(head)) {
    const { dataset, entries } = await readFlagFile(path);
    return { dataset, flags: entries };
  }
  return (await import("./read-flag-table.ts")).readFlagCsv(path);
}

async function headOf(path: string): Promise<string> {
  const place = { file: path };
  try {
    const status = await stat(path);
    if (!status.isFile()) throw new InputError("this is not a file of flags", place, "Name the file itself");
    if (status.size > LARGEST_FILE) {
      const found = `${status.size} bytes: at most ${LARGEST_FILE}`;
      throw new InputError(found, place, "Say the same with fewer, larger entries");
    }
    const handle = await open(path);
    try {
      const bytes = Buffer.alloc(HEAD_BYTES);
      const { bytesRead } = await handle.read(bytes, 0, HEAD_BYTES, 0);
      return bytes.toString("latin1", 0, bytesRead);
    } finally {
      await handle.close();
    }
  } catch (error) {
    if (error instanceof InputError) throw error;
    throw new InputError("no such file of flags", place, "Check the path", { cause: error });
  }
}
