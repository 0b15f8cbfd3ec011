/** The sketches of one owner, in the kernels' memory: a directory of pages, and pages of counts. */
import { type Arena, kernelMemory } from "../util/kernels/memory.ts";
import { entryOf, PAGES, pageOfEntry } from "./kernels/count-sketches.ts";

/** A count holds the rest of a number by this; how often this is noted beside. Half of what 16 bits hold. */
const PASS = 32768;
/** The most that a count of 16 bits holds. */
const FULL = 65535;
/** Noise and steady signals fill three or four pages of a sketch. */
const USUAL_PAGES = 3;

/** Where a number of some rank is. */
export interface Ranked {
  readonly bucket: number;
  /** numbers of the sketch */
  readonly total: number;
  /** numbers in lower buckets, and in this one */
  readonly below: number;
  readonly count: number;
}

export class SketchBook {
  readonly directoryAt: number;
  readonly slots: number;
  countsAt: number;
  /** pages that there is room for, and in use, page 0 included, which is of no sketch */
  capacity: number;
  pages = 1;
  /** by place in `counts`: how often the count passed PASS */
  readonly passes = new Map<number, number>();
  /** no count is higher than this */
  private most = 0;
  private readonly arena: Arena;
  private readonly pageShift: number;

  constructor(sketches: number, pageShift: number, arena: Arena, capacity = 1 + USUAL_PAGES * sketches) {
    this.arena = arena;
    this.pageShift = pageShift;
    this.slots = sketches * PAGES;
    this.capacity = capacity;
    this.directoryAt = arena.require(4 * this.slots);
    this.countsAt = arena.require(this.pageBytes * this.capacity);
    const { u32 } = kernelMemory.heap;
    const first = this.directoryAt / 4;
    for (let slot = 0; slot < PAGES; slot++) u32[first + slot] = entryOf(0, slot, pageShift);
    for (let done = PAGES; done < this.slots; done *= 2) {
      u32.copyWithin(first + done, first, first + Math.min(done, this.slots - done));
    }
    this.clearPage(0);
  }

  get pageBytes(): number {
    return 2 << this.pageShift;
  }

  /** Bytes in use. */
  get bytes(): number {
    return 4 * this.slots + this.pages * this.pageBytes;
  }

  /** Page of a slot of the directory; 0 none. */
  pageAt(slot: number): number {
    return pageOfEntry(kernelMemory.heap.u32[this.directoryAt / 4 + slot]!, slot % PAGES, this.pageShift);
  }

  /** (pages x buckets of a page) counts but for their passes. Good until memory is allocated. */
  get counts(): Uint16Array<SharedArrayBuffer> {
    const first = this.countsAt / 2;
    return kernelMemory.heap.u16.subarray(first, first + (this.pages << this.pageShift));
  }

  /** Take over pages and counts. @param pages of each slot */
  restore(pages: Uint32Array, counts: Uint16Array, passes: Iterable<readonly [number, number]>): void {
    this.pages = counts.length >> this.pageShift;
    for (const [slot, page] of pages.entries()) if (page > 0) this.setPage(slot, page);
    this.counts.set(counts);
    for (const [place, times] of passes) this.passes.set(place, times);
    this.most = FULL;
  }

  /** The page of a slot of the directory, made if there is none. */
  pageOf(slot: number): number {
    const known = this.pageAt(slot);
    if (known !== 0) return known;
    if (this.pages === this.capacity) this.grow();
    const page = this.pages++;
    this.setPage(slot, page);
    this.clearPage(page);
    return page;
  }

  private setPage(slot: number, page: number): void {
    kernelMemory.heap.u32[this.directoryAt / 4 + slot] = entryOf(page, slot % PAGES, this.pageShift);
  }

  private clearPage(page: number): void {
    const first = this.countsAt / 2 + (page << this.pageShift);
    kernelMemory.heap.u16.fill(0, first, first + (1 << this.pageShift));
  }

  grow(): void {
    this.capacity = Math.max(this.pages + 1, Math.ceil((this.capacity * 5) / 4));
    const grown = this.arena.require(this.pageBytes * this.capacity);
    kernelMemory.heap.u8.copyWithin(grown, this.countsAt, this.countsAt + this.pages * this.pageBytes);
    this.arena.release(this.countsAt);
    this.countsAt = grown;
  }

  /** Make sure that no count passes what it can hold when any of them grows by this much, at most PASS. */
  expect(numbers: number): void {
    if (this.most + numbers > FULL) this.notePasses();
    this.most += numbers;
  }

  private notePasses(): void {
    const { counts } = this;
    // Page 0 is of no sketch.
    for (let place = 1 << this.pageShift; place < counts.length; place++) {
      if (counts[place]! < PASS) continue;
      this.passes.set(place, (this.passes.get(place) ?? 0) + 1);
      counts[place]! -= PASS;
    }
    this.most = PASS - 1;
  }

  /** @param place (page << pageShift) + bucket of the page */
  countAt(place: number): number {
    const passes = this.passes.size === 0 ? 0 : (this.passes.get(place) ?? 0);
    return kernelMemory.heap.u16[this.countsAt / 2 + place]! + passes * PASS;
  }

  addAt(place: number, count: number): void {
    const { u16 } = kernelMemory.heap;
    const at = this.countsAt / 2 + place;
    const sum = u16[at]! + count;
    u16[at] = sum % PASS;
    this.most = Math.max(this.most, u16[at]!);
    const passes = Math.floor(sum / PASS);
    if (passes > 0) this.passes.set(place, (this.passes.get(place) ?? 0) + passes);
  }

  /** Numbers in a page. */
  countOfPage(page: number): number {
    if (page === 0) return 0;
    const from = page << this.pageShift;
    const to = from + (1 << this.pageShift);
    let total = 0;
    for (let place = from; place < to; place++) total += this.countAt(place);
    return total;
  }

  /** The number of rank floor(share (n - 1)) of a sketch, counted with all passes; undefined where n is 0. */
  rank(sketch: number, share: number): Ranked | undefined {
    const slots = Array.from({ length: PAGES }, (_, p) => this.pageAt(sketch * PAGES + p));
    const held = slots.map((page) => this.countOfPage(page));
    const total = held.reduce((sum, count) => sum + count, 0);
    if (total === 0) return undefined;
    const rank = Math.floor(share * (total - 1));
    let below = 0;
    let slot = 0;
    for (; below + held[slot]! <= rank; slot++) below += held[slot]!;
    const first = slots[slot]! << this.pageShift;
    let k = 0;
    for (; below + this.countAt(first + k) <= rank; k++) below += this.countAt(first + k);
    return { bucket: (slot << this.pageShift) + k, total, below, count: this.countAt(first + k) };
  }

  release(): void {
    this.arena.release(this.directoryAt);
    this.arena.release(this.countsAt);
  }
}
