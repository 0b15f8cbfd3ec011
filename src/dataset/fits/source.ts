/**
 * Bytes of a file, plain or gzipped, at any position, without ever holding the file.
 * Positions and sizes are of the content: of what a gzipped file unpacks to.
 */
import { constants, readSync } from "node:fs";
import { access, open, stat } from "node:fs/promises";
import { InputError } from "../../util/errors.ts";
import type { ByteSource, Cursor } from "./byte-source.ts";
import { GzipSource } from "./gzip.ts";

/**
 * Open a file for reading, unpacking gzip told by its first bytes.
 *
 * @throws InputError with advice when it is missing, empty, a folder or unreadable
 */
export async function openSource(path: string): Promise<ByteSource> {
  const bytesOnDisk = await sizeOf(path);
  const start = new Uint8Array(2);
  const plain = new PlainSource(path, bytesOnDisk);
  const cursor = await plain.cursor();
  try {
    await cursor.read(start, 0);
  } finally {
    await cursor.close();
  }
  // RFC 1952, section 2.3.1: every gzip member starts with these two bytes.
  return start[0] === 0x1f && start[1] === 0x8b ? new GzipSource(path, bytesOnDisk) : plain;
}

async function sizeOf(path: string): Promise<number> {
  let size: number;
  try {
    const status = await stat(path);
    if (status.isDirectory()) {
      throw new InputError("this is a folder: expected a file", { file: path }, "Name a file inside it");
    }
    if (!status.isFile()) throw new InputError("this is not a regular file", { file: path });
    await access(path, constants.R_OK);
    size = status.size;
  } catch (error) {
    throw asInputError(error, path);
  }
  if (size === 0) {
    throw new InputError("the file is empty", { file: path }, "The copy failed, or writing has not begun");
  }
  return size;
}

/** What the operating system says, for the person at the keyboard. */
function asInputError(error: unknown, path: string): unknown {
  if (error instanceof InputError) return error;
  const code = (error as NodeJS.ErrnoException).code;
  const place = { file: path };
  const cause = { cause: error };
  switch (code) {
    case "ENOENT":
    case "ENOTDIR":
      return new InputError("there is no such file", place, "Check the spelling and the folder", cause);
    case "EACCES":
    case "EPERM":
      return new InputError("you may not read this file", place, "Ask its owner for read permission", cause);
    case undefined:
      return error;
    default:
      return new InputError(`the file cannot be read (${code})`, place, undefined, cause);
  }
}

class PlainSource implements ByteSource {
  readonly path: string;
  readonly bytesOnDisk: number;
  readonly sequential = false;

  constructor(path: string, bytesOnDisk: number) {
    this.path = path;
    this.bytesOnDisk = bytesOnDisk;
  }

  async cursor(): Promise<Cursor> {
    const { path, bytesOnDisk } = this;
    const handle = await open(path).catch((error: unknown) => {
      throw asInputError(error, path);
    });
    return {
      async read(into, at) {
        let done = 0;
        while (done < into.length) {
          const { bytesRead } = await handle
            .read(into, done, into.length - done, at + done)
            .catch((error: unknown) => {
              throw asInputError(error, path);
            });
          if (bytesRead === 0) break;
          done += bytesRead;
        }
        return done;
      },
      readNow(into, at) {
        let done = 0;
        while (done < into.length) {
          const bytesRead = readNow(handle.fd, path, into, done, at + done);
          if (bytesRead === 0) break;
          done += bytesRead;
        }
        return done;
      },
      reach: async (at) => Math.min(at, bytesOnDisk),
      close: () => handle.close(),
    };
  }
}

function readNow(fd: number, path: string, into: Uint8Array, from: number, at: number): number {
  try {
    return readSync(fd, into, from, into.length - from, at);
  } catch (error) {
    throw asInputError(error, path);
  }
}
