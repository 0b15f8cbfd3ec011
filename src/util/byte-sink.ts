/** Bytes into a new file, one after another, packed by gzip or as they are. */
import type { FileHandle } from "node:fs/promises";
import { Writable } from "node:stream";
import { pipeline } from "node:stream/promises";
import { createGzip, type Gzip } from "node:zlib";
import type { OpenFile } from "./new-output.ts";

export interface ByteSink {
  /** The bytes may be changed afterwards. */
  write(bytes: Uint8Array): Promise<void>;
  /** All on the disk, not only on its way. */
  finish(): Promise<void>;
  /** Close, whatever is there. */
  abandon(): Promise<void>;
}

/** @param gzip packed, the same bytes whenever it is done: no time, no name inside */
export async function openSink(path: string, gzip: boolean, openFile: OpenFile): Promise<ByteSink> {
  // "wx": never through a link or into a file that somebody else put there.
  const handle = await openFile(path, "wx");
  return gzip ? new GzipSink(handle) : new PlainSink(handle);
}

class PlainSink implements ByteSink {
  readonly #handle: FileHandle;

  constructor(handle: FileHandle) {
    this.#handle = handle;
  }

  write(bytes: Uint8Array): Promise<void> {
    return writeAll(this.#handle, bytes);
  }

  async finish(): Promise<void> {
    // Some file systems tell of a full disk only here.
    await this.#handle.sync();
    await this.#handle.close();
  }

  async abandon(): Promise<void> {
    await this.#handle.close().catch(() => {});
  }
}

class GzipSink implements ByteSink {
  readonly #plain: PlainSink;
  readonly #gzip: Gzip = createGzip();
  readonly #written: Promise<void>;

  constructor(handle: FileHandle) {
    this.#plain = new PlainSink(handle);
    const out = new Writable({
      write: (chunk: Buffer, _, done) => {
        this.#plain.write(chunk).then(() => done(), done);
      },
    });
    this.#written = pipeline(this.#gzip, out);
    // Met where it is awaited.
    this.#written.catch(() => {});
  }

  async write(bytes: Uint8Array): Promise<void> {
    const taken = new Promise<void>((resolve, reject) => {
      this.#gzip.write(Buffer.from(bytes), (error) => (error ? reject(error) : resolve()));
    });
    // When the far end fails, the callback of the write may never come.
    await Promise.race([taken, this.#written]);
  }

  async finish(): Promise<void> {
    this.#gzip.end();
    await this.#written;
    await this.#plain.finish();
  }

  async abandon(): Promise<void> {
    this.#gzip.destroy();
    await this.#written.catch(() => {});
    await this.#plain.abandon();
  }
}

async function writeAll(handle: FileHandle, bytes: Uint8Array): Promise<void> {
  let done = 0;
  while (done < bytes.length) {
    const { bytesWritten } = await handle.write(bytes, done, bytes.length - done);
    done += bytesWritten;
  }
}
