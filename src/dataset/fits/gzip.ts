/**
 * The content of a gzipped file as a stream that moves forward. Memory is one chunk whatever the content unpacks to:
 * nothing is kept, and only as much is unpacked as is asked for.
 */
import { open } from "node:fs/promises";
import { pipeline, Readable } from "node:stream";
import { createGunzip, type Gunzip } from "node:zlib";
import { InputError } from "../../util/errors.ts";
import type { ByteSource, Cursor } from "./byte-source.ts";

const PACKED_CHUNK = 128 * 1024;
const UNPACKED_CHUNK = 256 * 1024;

export class GzipSource implements ByteSource {
  readonly path: string;
  readonly bytesOnDisk: number;
  readonly sequential = true;
  /** a stream put back by its last reader, so that the next one need not unpack from the start */
  #idle: Unpacking | undefined;

  constructor(path: string, bytesOnDisk: number) {
    this.path = path;
    this.bytesOnDisk = bytesOnDisk;
  }

  async cursor(from = 0): Promise<Cursor> {
    let stream = this.#take(from) ?? new Unpacking(this.path);
    return {
      read: async (into, at) => {
        if (at < stream.position) {
          stream.drop();
          stream = new Unpacking(this.path);
        }
        await stream.skipTo(at);
        return stream.position < at ? 0 : await stream.read(into);
      },
      reach: async (at) => {
        if (at > stream.position) await stream.skipTo(at);
        return Math.min(at, Math.max(stream.position, stream.length ?? 0));
      },
      close: async () => {
        this.#idle?.drop();
        this.#idle = stream.failed ? undefined : stream;
      },
    };
  }

  #take(from: number): Unpacking | undefined {
    const idle = this.#idle;
    if (idle === undefined || idle.position > from) return undefined;
    this.#idle = undefined;
    return idle;
  }
}

/** One pass over the content. */
class Unpacking {
  /** bytes of content before the next one to be given */
  position = 0;
  /** of the content, once its end has been met */
  length: number | undefined;
  failed = false;
  readonly #path: string;
  readonly #gunzip: Gunzip;
  readonly #chunks: AsyncIterator<Buffer>;
  #chunk: Buffer = Buffer.alloc(0);

  constructor(path: string) {
    this.#path = path;
    this.#gunzip = createGunzip({ chunkSize: UNPACKED_CHUNK });
    // Errors of either end arrive at the iterator; the callback only keeps them from being thrown twice.
    pipeline(Readable.from(packedChunks(path), { highWaterMark: 1 }), this.#gunzip, () => {});
    this.#chunks = this.#gunzip[Symbol.asyncIterator]();
  }

  drop(): void {
    this.#gunzip.destroy();
  }

  async skipTo(at: number): Promise<void> {
    while (this.position < at && (await this.#fill())) {
      const step = Math.min(this.#chunk.length, at - this.position);
      this.#advance(step);
    }
  }

  async read(into: Uint8Array): Promise<number> {
    let done = 0;
    while (done < into.length && (await this.#fill())) {
      const step = Math.min(this.#chunk.length, into.length - done);
      into.set(this.#chunk.subarray(0, step), done);
      this.#advance(step);
      done += step;
    }
    return done;
  }

  #advance(step: number): void {
    this.#chunk = this.#chunk.subarray(step);
    this.position += step;
  }

  /** Have at least one byte at hand; false at the end. */
  async #fill(): Promise<boolean> {
    while (this.#chunk.length === 0) {
      if (this.length !== undefined) return false;
      const next = await this.#next();
      if (next.done === true) {
        this.length = this.position;
        return false;
      }
      this.#chunk = next.value;
    }
    return true;
  }

  async #next(): Promise<IteratorResult<Buffer, unknown>> {
    try {
      return await this.#chunks.next();
    } catch (cause) {
      this.failed = true;
      const { code } = cause as NodeJS.ErrnoException;
      if (!code?.startsWith("Z_")) throw cause;
      const what = code === "Z_BUF_ERROR" ? "ends early" : `is damaged (${(cause as Error).message})`;
      throw new InputError(
        `the gzip stream ${what} after ${this.position} bytes of content`,
        { file: this.#path },
        "The copy is probably incomplete: compare its size with the original and copy it again",
        { cause },
      );
    }
  }
}

/** The packed bytes. The file is open only while a chunk is read, so that a stream left half-read holds nothing. */
async function* packedChunks(path: string): AsyncGenerator<Buffer> {
  for (let at = 0; ; ) {
    const chunk = Buffer.alloc(PACKED_CHUNK);
    const handle = await open(path);
    let got: number;
    try {
      got = (await handle.read(chunk, 0, PACKED_CHUNK, at)).bytesRead;
    } finally {
      await handle.close();
    }
    if (got === 0) return;
    at += got;
    yield chunk.subarray(0, got);
  }
}
