/** A working file in the folder for temporary files: written at any place, its errors said in the user's words. */
import { closeSync, openSync, readSync, writeSync } from "node:fs";
import { InputError } from "../../util/errors.ts";

export class SpoolFile {
  readonly path: string;
  readonly #descriptor: number;
  bytes = 0;

  /** @throws InputError when it cannot be made */
  constructor(path: string) {
    this.path = path;
    try {
      // "wx": never through a link, nor into a file that somebody else put there.
      this.#descriptor = openSync(path, "wx+", 0o600);
    } catch (cause) {
      throw spoolError(path, cause);
    }
  }

  write(bytes: Uint8Array, at: number): void {
    try {
      for (let done = 0; done < bytes.length; ) {
        done += writeSync(this.#descriptor, bytes, done, bytes.length - done, at + done);
      }
    } catch (cause) {
      throw spoolError(this.path, cause);
    }
    this.bytes = Math.max(this.bytes, at + bytes.length);
  }

  read(into: Uint8Array, at: number): void {
    for (let done = 0; done < into.length; ) {
      const got = readSync(this.#descriptor, into, done, into.length - done, at + done);
      if (got === 0) throw spoolError(this.path, new Error("it became shorter"));
      done += got;
    }
  }

  close(): void {
    closeSync(this.#descriptor);
  }
}

export function spoolError(path: string, cause: unknown): InputError {
  const code = (cause as NodeJS.ErrnoException).code;
  const full = code === "ENOSPC" || code === "EDQUOT";
  return new InputError(
    full
      ? "the disk for temporary files is full"
      : `the temporary file cannot be used (${code ?? String(cause)})`,
    { file: path },
    "A table is unpacked into a working copy: set TMPDIR to a folder with room for it",
    { cause },
  );
}

export function bytesOf(array: Float32Array | Float64Array | Uint32Array): Uint8Array {
  return new Uint8Array(array.buffer, array.byteOffset, array.byteLength);
}
