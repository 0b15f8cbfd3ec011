/**
 * The bytes of the rows of a request, some blocks at a time. Bytes that are in memory already are copied at once, into a
 * buffer so small that it stays in the processor's cache; bytes that must come from a disk are read ahead, while the
 * chunk before them is used. Which of the two a file is, is told by how long its reads take. The bytes are the same.
 */
import { InputError } from "../../util/errors.ts";
import { type Arena, kernelMemory } from "../../util/kernels/memory.ts";
import type { ByteSource, Cursor } from "../fits/byte-source.ts";
import { type BlockRange, blockRange, type ReadPlan, type RowStore } from "./plan.ts";

/** Bytes of a chunk, at least a block. */
const CHUNK_BYTES = 256 * 1024;
/** Slower than this, bytes a second, a read may have been of bytes on a disk. */
const SLOW = 1e9;
/** Slow reads in a row that are taken for such, whatever the system says: it does not know of every network's disks. */
const MOST_SLOW = 16;
/** Bytes that are read ahead before another try at bytes in memory. */
const AHEAD_BYTES = 64e6;

export class Chunks {
  /** rows of a chunk: a whole number of blocks */
  readonly rows: number;
  private readonly source: ByteSource;
  private readonly store: RowStore;
  private readonly plan: ReadPlan;
  private readonly cursor: Cursor;
  private readonly arena: Arena;
  private readonly buffers: Uint8Array[] = [];
  private turn = 0;
  private pending: { readonly row: number; readonly bytes: Promise<Uint8Array> } | undefined;
  /** bytes still to be read ahead */
  private ahead = 0;
  /** slow reads without another between them */
  private slow = 0;
  /** what the system has read from disks for this process, in its own unit */
  private fromDisk = process.resourceUsage().fsRead;

  /** @param arena where the buffers are to lie if there is room */
  constructor(source: ByteSource, cursor: Cursor, store: RowStore, plan: ReadPlan, arena: Arena) {
    this.source = source;
    this.cursor = cursor;
    this.store = store;
    const blocks = Math.max(1, Math.floor(CHUNK_BYTES / (plan.blockRows * plan.rowBytes)));
    this.rows = blocks * plan.blockRows;
    this.plan = { ...plan, blockRows: this.rows };
    this.arena = arena;
  }

  /**
   * The bytes of the chunk that begins at a row; chunks are asked for in turn. Valid until the next is asked for.
   *
   * @throws InputError where the file has become shorter
   */
  read(row: number): Uint8Array | Promise<Uint8Array> {
    const { pending } = this;
    this.pending = undefined;
    if (pending?.row === row) {
      this.readAhead(row + this.rows);
      return pending.bytes;
    }
    if (this.cursor.readNow === undefined || this.plan.scattered) {
      const bytes = this.readLater(row);
      this.ahead = Number.POSITIVE_INFINITY;
      this.readAhead(row + this.rows);
      return bytes;
    }
    const start = performance.now();
    const bytes = this.readAtOnce(row);
    if (this.wasFromDisk(bytes.length / SLOW, (performance.now() - start) / 1e3)) {
      this.ahead = AHEAD_BYTES;
      this.readAhead(row + this.rows);
    }
    return bytes;
  }

  /** A read that took long may also have waited for the processor: the system knows whether a disk was asked. */
  private wasFromDisk(usual: number, seconds: number): boolean {
    if (seconds < usual) {
      this.slow = 0;
      return false;
    }
    this.slow += 1;
    const { fsRead } = process.resourceUsage();
    const asked = fsRead > this.fromDisk;
    this.fromDisk = fsRead;
    if (!asked && this.slow < MOST_SLOW) return false;
    this.slow = 0;
    return true;
  }

  /** Wait for what is under way: its buffer is about to be released. */
  async settle(): Promise<void> {
    await this.pending?.bytes.catch(() => {});
  }

  private readAhead(row: number): void {
    if (this.ahead <= 0 || row >= this.plan.endRow) return;
    this.ahead -= this.rows * this.plan.rowBytes;
    const bytes = this.readLater(row);
    // Rejections are met where the chunk is asked for; one that never is must not leave one unhandled.
    bytes.catch(() => {});
    this.pending = { row, bytes };
  }

  private nextBuffer(length: number): Uint8Array {
    this.turn = 1 - this.turn;
    this.buffers[this.turn] ??= newBuffer(this.rows * this.plan.rowBytes, this.arena);
    return this.buffers[this.turn]!.subarray(0, length);
  }

  private readAtOnce(row: number): Uint8Array {
    const range = blockRange(this.store, this.plan, row);
    // One buffer alone stays in the cache.
    this.turn = 1;
    const bytes = this.nextBuffer(range.rows * this.plan.rowBytes);
    requireAll(this.store, range, this.cursor.readNow!(bytes, range.byte), bytes.length);
    return bytes;
  }

  /** Piece by piece when most of each row is skipped, else in one read. */
  private async readLater(row: number): Promise<Uint8Array> {
    const { store, plan, cursor } = this;
    const range = blockRange(store, plan, row);
    const bytes = this.nextBuffer(range.rows * plan.rowBytes);
    if (!plan.scattered) {
      requireAll(store, range, await cursor.read(bytes, range.byte), bytes.length);
      return bytes;
    }
    const together = this.source.sequential ? 1 : 32;
    for (let first = 0; first < range.rows; first += together) {
      const count = Math.min(together, range.rows - first);
      await Promise.all(Array.from({ length: count }, (_, k) => this.readPieces(range, first + k, bytes)));
    }
    return bytes;
  }

  private async readPieces(range: BlockRange, row: number, bytes: Uint8Array): Promise<void> {
    const { store, plan } = this;
    let at = row * plan.rowBytes;
    for (const { offset, bytes: length } of plan.pieces) {
      const part = bytes.subarray(at, at + length);
      const got = await this.cursor.read(part, range.byte + row * store.rowBytes + offset);
      requireAll(store, { ...range, firstRow: range.firstRow + row }, got, length);
      at += length;
    }
  }
}

function newBuffer(bytes: number, arena: Arena): Uint8Array {
  const address = arena.allocate(bytes);
  return address === undefined
    ? new Uint8Array(bytes)
    : new Uint8Array(kernelMemory.heap.u8.buffer, address, bytes);
}

/** The size was right when the file was opened. */
function requireAll(store: RowStore, range: BlockRange, got: number, expected: number): void {
  if (got === expected) return;
  throw new InputError(
    `the file now ends at byte ${range.byte + got}: expected ${expected} bytes of ${store.word} ${range.firstRow + 1} ` +
      "and after",
    { ...store.place, byte: range.byte },
    "The file became shorter while it was read: wait until it is written",
  );
}
