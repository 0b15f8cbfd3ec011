/**
 * The memory that compiled kernels and TypeScript share, one a thread: typed arrays of it are passed to a kernel by the
 * byte they begin at, and nothing is copied.
 *
 * It grows as more is asked for. It is a shared memory for one reason alone: views of such a memory outlive its growth.
 * Addresses are below 2^31. What is allocated must be released: no collector does.
 */

import { Memory, type WebAssemblyMemory } from "./web-assembly.ts";

const WASM_PAGE = 65_536;
/** 2 GB, of which only what is used takes room. Must be what `build.mjs` compiles for. */
const MOST_PAGES = 32_768;
/** The first bytes belong to the compiled module. */
const START = 4096;
/** A cache line: rows of vectors neither straddle one nor share one. */
const ALIGNMENT = 64;
/** Bytes behind every allocation that belong to nobody: vectors may reach over its end. */
const SLACK = 16;
/** Least growth, pages: 4 MB. */
const STEP = 64;

/** Numbers of the memory by their kind, for plain kernels: index = address / size. */
export interface Heap {
  readonly u8: Uint8Array<SharedArrayBuffer>;
  readonly u16: Uint16Array<SharedArrayBuffer>;
  readonly i32: Int32Array<SharedArrayBuffer>;
  readonly u32: Uint32Array<SharedArrayBuffer>;
  readonly f32: Float32Array<SharedArrayBuffer>;
  readonly f64: Float64Array<SharedArrayBuffer>;
}

interface Range {
  start: number;
  end: number;
}

class KernelMemory {
  readonly memory = new Memory({ initial: 1, maximum: MOST_PAGES, shared: true });
  /** whole and current: take it anew after any allocation */
  heap: Heap = heapOf(this.memory);
  /** ascending, none touching the next */
  private readonly free: Range[] = [{ start: START, end: WASM_PAGE }];
  /** bytes by address */
  private readonly taken = new Map<number, number>();

  /**
   * @returns address of as many bytes, whatever they hold, at a multiple of 64, with 16 more that vectors may reach into;
   *          undefined where there is no more room
   */
  allocate(bytes: number): number | undefined {
    const size = Math.ceil((bytes + SLACK) / ALIGNMENT) * ALIGNMENT;
    let range = this.free.find(({ start, end }) => end - start >= size);
    if (range === undefined) {
      if (!this.grow(size)) return undefined;
      range = this.free.at(-1)!;
    }
    const address = range.start;
    range.start += size;
    if (range.start === range.end) this.free.splice(this.free.indexOf(range), 1);
    this.taken.set(address, size);
    return address;
  }

  /** @throws RangeError for what is not allocated (a defect of the caller) */
  release(address: number): void {
    const size = this.taken.get(address);
    if (size === undefined) throw new RangeError(`nothing is allocated at ${address}`);
    this.taken.delete(address);
    let place = this.free.findIndex(({ start }) => start > address);
    if (place < 0) place = this.free.length;
    this.free.splice(place, 0, { start: address, end: address + size });
    this.joinNext(place);
    if (place > 0) this.joinNext(place - 1);
  }

  /** Bytes allocated, for tests of what is released. */
  get used(): number {
    let total = 0;
    for (const size of this.taken.values()) total += size;
    return total;
  }

  /** Address of a view of this memory; undefined where the view is of another. */
  addressOf(view: ArrayBufferView): number | undefined {
    // Each growth makes another object of the same memory; all of them begin at its first byte.
    return ours.has(view.buffer) ? view.byteOffset : undefined;
  }

  private joinNext(place: number): void {
    const range = this.free[place]!;
    const next = this.free[place + 1];
    if (next === undefined || next.start !== range.end) return;
    range.end = next.end;
    this.free.splice(place + 1, 1);
  }

  private grow(bytes: number): boolean {
    const before = this.memory.buffer.byteLength;
    const last = this.free.at(-1);
    const rest = last !== undefined && last.end === before ? before - last.start : 0;
    const needed = Math.ceil((bytes - rest) / WASM_PAGE);
    const room = MOST_PAGES - before / WASM_PAGE;
    if (needed > room) return false;
    try {
      this.memory.grow(Math.min(room, Math.max(needed, STEP)));
    } catch {
      return false;
    }
    this.heap = heapOf(this.memory);
    const end = this.memory.buffer.byteLength;
    if (rest > 0) last!.end = end;
    else this.free.push({ start: before, end });
    return true;
  }
}

const ours = new WeakSet<ArrayBufferLike>();

function heapOf(memory: WebAssemblyMemory): Heap {
  const { buffer } = memory;
  ours.add(buffer);
  return {
    u8: new Uint8Array(buffer),
    u16: new Uint16Array(buffer),
    i32: new Int32Array(buffer),
    u32: new Uint32Array(buffer),
    f32: new Float32Array(buffer),
    f64: new Float64Array(buffer),
  };
}

export const kernelMemory = new KernelMemory();

/** Allocations that are released together, at the latest when their owner is collected. */
export class Arena {
  private readonly addresses: number[] = [];

  /** @param owner whatever uses the memory */
  constructor(owner?: object) {
    if (owner !== undefined) collected.register(owner, this.addresses);
  }

  /** @returns undefined where there is no more room */
  allocate(bytes: number): number | undefined {
    const address = kernelMemory.allocate(bytes);
    if (address !== undefined) this.addresses.push(address);
    return address;
  }

  /** @throws RangeError where there is no more room */
  require(bytes: number): number {
    const address = this.allocate(bytes);
    if (address === undefined) throw new RangeError(`no ${bytes} bytes are left of the kernels' memory`);
    return address;
  }

  /** All of them, or the one at an address. */
  release(address?: number): void {
    const { addresses } = this;
    const gone =
      address === undefined ? addresses.splice(0) : addresses.splice(addresses.indexOf(address), 1);
    for (const one of gone) kernelMemory.release(one);
  }
}

const collected = new FinalizationRegistry<number[]>((addresses) => {
  for (const address of addresses.splice(0)) kernelMemory.release(address);
});
