/** Files written beside their final name and renamed into place: a killed run leaves the old file or the new. */
import { open, rename, rm } from "node:fs/promises";
import { InputError } from "./errors.ts";

/** Apart from the process number, so that two writers in one process never share a name. */
let written = 0;

/**
 * Replace the file at `path`, or make it. Its folder must exist. On an error nothing is left behind and a file that
 * was there stays as it was.
 *
 * @throws InputError when it cannot be written, or the disk is full
 */
export function writeTextFile(path: string, text: string): Promise<void> {
  return writeWhole(path, text);
}

/** The same for bytes. */
export function writeBytesFile(path: string, bytes: Uint8Array): Promise<void> {
  return writeWhole(path, bytes);
}

/** The same for bytes in pieces, one after the other. */
export function writePieces(path: string, pieces: Iterable<Uint8Array>): Promise<void> {
  return writeWhole(path, pieces);
}

async function writeWhole(path: string, content: string | Uint8Array | Iterable<Uint8Array>): Promise<void> {
  written += 1;
  const beside = `${path}.${process.pid}-${written}.tmp`;
  try {
    // "wx": never write through a link or into a file that somebody else put there.
    const handle = await open(beside, "wx");
    try {
      if (typeof content === "string" || ArrayBuffer.isView(content)) await handle.writeFile(content, "utf8");
      else for (const piece of content) await handle.writeFile(piece);
      // Some file systems tell of a full disk only here; after the rename it would be too late.
      await handle.sync();
    } finally {
      await handle.close();
    }
    await rename(beside, path);
  } catch (cause) {
    const code = (cause as NodeJS.ErrnoException).code ?? "";
    // The error at hand says more than that there was nothing to take away.
    if (code !== "EEXIST") await rm(beside, { force: true }).catch(() => {});
    throw new InputError(
      `the file cannot be written${code === "" ? "" : ` (${code})`}`,
      { file: path },
      adviceFor(code),
      {
        cause,
      },
    );
  }
}

/** What to do about an error of the file system, a sentence without its full stop. */
export function adviceFor(code: string): string {
  if (code === "ENOSPC" || code === "EDQUOT")
    return "The disk or your quota is full: free some space and run it again";
  if (code === "EACCES" || code === "EPERM" || code === "EROFS") {
    return "You may not write there: choose another folder with --out";
  }
  if (code === "EISDIR" || code === "ENOTDIR" || code === "EEXIST") {
    return "Something else has that name: move it away or choose another folder with --out";
  }
  return "Check that the folder exists and can be written";
}
