/** The sketches of one owner, in the kernels' memory: a directory of pages, and pages of counts. */
import { type Arena, kernelMemory } from "../util/kernels/memory.ts";
import { PAGES } from "./kernels/count-sketches.ts";

/** Numbers that a count of 16 bits tells apart. */
const FULL = 65536;
/** Noise and steady signals fill three or four pages of a sketch. */
const USUAL_PAGES = 3;

export class SketchBook {
  readonly directoryAt: number;
  readonly slots: number;
  countsAt: number;
  /** pages that there is room for, and in use, page 0 included, which stays empty */
  capacity: number;
  pages = 1;
  /** by place in `counts`: how often the count passed 65536 */
  readonly passes = new Map<number, number>();
  private readonly arena: Arena;
  private readonly pageShift: number;

  constructor(sketches: number, pageShift: number, arena: Arena, capacity = 1 + USUAL_PAGES * sketches) {
    this.arena = arena;
    this.pageShift = pageShift;
    this.slots = sketches * PAGES;
    this.capacity = capacity;
    this.directoryAt = arena.require(4 * this.slots);
    this.countsAt = arena.require(this.pageBytes * this.capacity);
    this.directory.fill(0);
    // Pages are zeroed as they are made; this one is empty for good.
    this.counts.fill(0);
  }

  get pageBytes(): number {
    return 2 << this.pageShift;
  }

  /** Bytes in use. */
  get bytes(): number {
    return 4 * this.slots + this.pages * this.pageBytes;
  }

  /** (sketches x PAGES) page number, 0 none. Good until memory is allocated. */
  get directory(): Uint32Array<SharedArrayBuffer> {
    return kernelMemory.heap.u32.subarray(this.directoryAt / 4, this.directoryAt / 4 + this.slots);
  }

  /** (pages x buckets of a page) counts modulo 65536. Good until memory is allocated. */
  get counts(): Uint16Array<SharedArrayBuffer> {
    const first = this.countsAt / 2;
    return kernelMemory.heap.u16.subarray(first, first + (this.pages << this.pageShift));
  }

  /** The page of a slot of the directory, made if there is none. */
  pageOf(slot: number): number {
    const at = this.directoryAt / 4 + slot;
    const known = kernelMemory.heap.u32[at]!;
    if (known !== 0) return known;
    if (this.pages === this.capacity) this.grow();
    const page = this.pages++;
    kernelMemory.heap.u32[at] = page;
    const first = this.countsAt / 2 + (page << this.pageShift);
    kernelMemory.heap.u16.fill(0, first, first + (1 << this.pageShift));
    return page;
  }

  grow(): void {
    this.capacity = Math.max(this.pages + 1, Math.ceil((this.capacity * 5) / 4));
    const grown = this.arena.require(this.pageBytes * this.capacity);
    kernelMemory.heap.u8.copyWithin(grown, this.countsAt, this.countsAt + this.pages * this.pageBytes);
    this.arena.release(this.countsAt);
    this.countsAt = grown;
  }

  /** @param place (page << pageShift) + bucket of the page */
  countAt(place: number): number {
    const passes = this.passes.size === 0 ? 0 : (this.passes.get(place) ?? 0);
    return kernelMemory.heap.u16[this.countsAt / 2 + place]! + passes * FULL;
  }

  addAt(place: number, count: number): void {
    const { u16 } = kernelMemory.heap;
    const at = this.countsAt / 2 + place;
    const sum = u16[at]! + count;
    u16[at] = sum % FULL;
    const passes = Math.floor(sum / FULL);
    if (passes > 0) this.passes.set(place, (this.passes.get(place) ?? 0) + passes);
  }

  countOfPage(page: number): number {
    if (page === 0) return 0;
    const from = page << this.pageShift;
    const to = from + (1 << this.pageShift);
    const { u16 } = kernelMemory.heap;
    const first = this.countsAt / 2;
    let total = 0;
    for (let place = from; place < to; place++) total += u16[first + place]!;
    if (this.passes.size > 0) {
      for (let place = from; place < to; place++) total += FULL * (this.passes.get(place) ?? 0);
    }
    return total;
  }

  release(): void {
    this.arena.release(this.directoryAt);
    this.arena.release(this.countsAt);
  }
}
