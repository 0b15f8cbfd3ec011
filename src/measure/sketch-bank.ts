/**
 * Many quantile sketches of positive numbers, one for each sample of a row and each owner (a baseline, or all of them).
 *
 * A sketch counts its numbers in logarithmic buckets: the exponent and the leading mantissa bits of the float32, so
 * that every finite float32 has its bucket and no scale is chosen beforehand. Counts lie in pages of four octaves that
 * are made when a number first falls into them. Adding counts merges sketches exactly, in any order, as in DDSketch
 * (Masson, Rim & Lee 2019, PVLDB 12, 2195).
 *
 * When the pages outgrow the budget, neighbours share a sketch: the bank steps down its ladder of maps. The step is the
 * first at which the pages of all the numbers fit; that number of pages does not depend on the order in which they
 * came, and so neither does the step.
 */

import { Arena, kernelMemory } from "../util/kernels/memory.ts";
import { countKernels, LINE, PAGES } from "./kernels/count-sketches.ts";
import type { SketchMap } from "./sharing-ladder.ts";
import { type Ranked, SketchBook } from "./sketch-book.ts";
import { bookFrom, bookState } from "./state/books.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** Octaves of a page, as a power of two; positive float32s span 256 octaves. */
const PAGE_OCTAVE_BITS = 8 - Math.log2(PAGES);
const COUNT_BYTES = 2;
const MOST_STAGED_ROWS = 1 << 16;
const MOST_STAGED_BYTES = 48e6;
const GATHERED_ROWS = 256;
/** Numbers that a sketch may be given in one go. */
const MOST_AT_ONCE = 1 << 15;

/** A number's bucket: its edges, and the number's place between them by rank, 0..1. */
interface Place {
  readonly low: number;
  readonly high: number;
  readonly within: number;
}

/** Addresses of a bank's arrays. */
interface Room {
  /** (samples) int32: a row on its way */
  readonly row: number;
  /** (staged rows x samples) uint16 */
  readonly staged: number;
  /** (gathered rows x stride) uint16: rows of one owner side by side */
  readonly gathered: number;
  /** (samples) uint32: the map in force, as bytes of a directory */
  readonly sketch: number;
  /** int32 */
  readonly pages: number;
  /** (3) uint32 */
  readonly rank: number;
}

export class SketchBank {
  private readonly ladder: readonly SketchMap[];
  private readonly budget: number;
  /** shift from the bits of a float32 to its bucket */
  private readonly bucketShift: number;
  /** shift from a bucket to its page */
  private readonly pageShift: number;
  private readonly books: (SketchBook | undefined)[] = [];
  private readonly samples: number;
  /** buckets of rows not counted yet: counted together, they cost a fraction of the memory traffic */
  private readonly stagedOwner: Int32Array;
  private stagedRows = 0;
  /** samples from one gathered row to the next: an odd number of cache lines, so that they do not collide */
  private readonly stride: number;
  private readonly arena: Arena = new Arena(this);
  /** addresses, made when the first row comes */
  private room: Room | undefined;
  /** samples that share a sketch of the map in force, at most */
  private largest = 1;
  private level = 0;
  private bytes = 0;

  /**
   * @param ladder         maps from fine to coarse
   * @param mantissaBits   2 to this many buckets an octave
   * @param budget         bytes that the pages may take while there is a coarser map to step down to
   * @param owners         how many there will be, as far as the dataset tells: maps that would not fit them are left
   *                       out from the start, which spares stepping down
   */
  constructor(ladder: readonly SketchMap[], mantissaBits: number, budget: number, owners: number) {
    const least = 4 * PAGES + ((2 * COUNT_BYTES) << (mantissaBits + PAGE_OCTAVE_BITS));
    const fitting = ladder.findIndex((map) => owners * map.sketches * least <= budget);
    this.ladder = ladder.slice(fitting < 0 ? ladder.length - 1 : fitting);
    this.budget = budget;
    this.bucketShift = 23 - mantissaBits;
    this.pageShift = mantissaBits + PAGE_OCTAVE_BITS;
    this.samples = ladder[0]!.sketch.length;
    const stagedBytes = Math.min(MOST_STAGED_BYTES, budget / 4);
    const fit = Math.floor(stagedBytes / COUNT_BYTES / this.samples);
    const rows = Math.max(1, Math.min(MOST_STAGED_ROWS, fit));
    this.stagedOwner = new Int32Array(rows);
    this.stride = (Math.ceil(this.samples / LINE) | 1) * LINE;
  }

  /** The map in force: which sketch each sample counts in. Counts what is staged, so that it is the final one. */
  get map(): SketchMap {
    this.flush();
    return this.ladder[this.level]!;
  }

  /**
   * Count a row of samples for an owner.
   *
   * @param bits   the bits of float32s >= 0; a negative one is no number and is left out
   * @param start  index in `bits` of the row's first sample
   */
  add(owner: number, bits: Int32Array, start: number): void {
    const { samples } = this;
    const { row } = this.placed();
    kernelMemory.heap.i32.set(bits.subarray(start, start + samples), row / 4);
    this.addAt(owner, row);
  }

  /** The same of bits at an address of the kernels' memory, a multiple of 4. */
  addAt(owner: number, bits: number): void {
    if (this.stagedRows === this.stagedOwner.length) this.flush();
    const { samples } = this;
    const to = this.placed().staged + COUNT_BYTES * this.stagedRows * samples;
    countKernels.stageBuckets(bits, samples, to, this.bucketShift);
    this.stagedOwner[this.stagedRows++] = owner;
  }

  /** Give the memory back. Nothing can be asked or added after. */
  release(): void {
    this.arena.release();
  }

  private placed(): Room {
    if (this.room !== undefined) return this.room;
    const { arena, samples, stride } = this;
    const rows = this.stagedOwner.length;
    this.room = {
      row: arena.require(4 * samples),
      staged: arena.require(COUNT_BYTES * rows * samples),
      gathered: arena.require(COUNT_BYTES * (stride * Math.min(rows, GATHERED_ROWS) + LINE)),
      sketch: arena.require(4 * samples),
      pages: arena.require(4),
      rank: arena.require(12),
    };
    this.placeMap();
    return this.room;
  }

  private placeMap(): void {
    if (this.room === undefined) return;
    const { u32 } = kernelMemory.heap;
    const first = this.room.sketch / 4;
    const { sketch, sketches } = this.ladder[this.level]!;
    const sizes = new Uint32Array(sketches);
    for (let i = 0; i < this.samples; i++) {
      u32[first + i] = 4 * PAGES * sketch[i]!;
      sizes[sketch[i]!]! += 1;
    }
    this.largest = sizes.reduce((most, size) => Math.max(most, size), 1);
  }

  /** Count the staged rows, owner by owner. */
  private flush(): void {
    const rows = this.stagedRows;
    if (rows === 0) return;
    this.stagedRows = 0;
    const { stagedOwner } = this;
    const order = orderByOwner(stagedOwner, rows);
    for (let from = 0; from < rows; ) {
      const owner = stagedOwner[order[from]!]!;
      let to = from;
      while (to < rows && to - from < GATHERED_ROWS && stagedOwner[order[to]!] === owner) {
        this.gather(order[to]!, to - from);
        to++;
      }
      this.countGathered(owner, to - from);
      from = to;
    }
  }

  private gather(row: number, place: number): void {
    const { samples } = this;
    const { staged, gathered } = this.placed();
    const first = staged + COUNT_BYTES * row * samples;
    const bytes = COUNT_BYTES * samples;
    kernelMemory.heap.u8.copyWithin(gathered + COUNT_BYTES * place * this.stride, first, first + bytes);
  }

  private countGathered(owner: number, rows: number): void {
    const { samples } = this;
    const { pages } = this.placed();
    const book = this.bookOf(owner);
    const before = book.bytes;
    const lines = Math.ceil(samples / LINE);
    // Counts are of 16 bits: no more at a time than they are sure to hold.
    const each = rows * this.largest <= MOST_AT_ONCE ? lines : Math.floor(MOST_AT_ONCE / rows / LINE);
    for (let line = 0; line < lines; line += each) {
      const end = Math.min(lines, line + each);
      book.expect(rows * Math.min(this.largest, each * LINE));
      for (let from = line; from < end; ) {
        kernelMemory.heap.u32[pages / 4] = book.pages;
        from = this.countLines(book, rows, from, end);
        book.pages = kernelMemory.heap.u32[pages / 4]!;
        if (from < end) book.grow();
      }
    }
    this.bytes += book.bytes - before;
    this.keepWithinBudget();
  }

  private countLines(book: SketchBook, rows: number, from: number, end: number): number {
    const { gathered, sketch, pages } = this.placed();
    return countKernels.countSketches(
      gathered,
      rows,
      this.stride,
      this.samples,
      sketch,
      book.directoryAt,
      book.countsAt,
      this.pageShift,
      pages,
      book.capacity,
      from,
      end,
    );
  }

  private bookOf(owner: number): SketchBook {
    let book = this.books[owner];
    if (book === undefined) {
      book = new SketchBook(this.ladder[this.level]!.sketches, this.pageShift, this.arena);
      this.books[owner] = book;
      this.bytes += book.bytes;
    }
    return book;
  }

  private keepWithinBudget(): void {
    while (this.bytes > this.budget && this.level + 1 < this.ladder.length) this.stepDown();
  }

  private stepDown(): void {
    const from = this.ladder[this.level]!;
    this.level += 1;
    const to = this.ladder[this.level]!;
    const next = new Uint32Array(from.sketches);
    for (let i = 0; i < from.sketch.length; i++) next[from.sketch[i]!] = to.sketch[i]!;
    this.placeMap();
    this.bytes = 0;
    for (const [owner, fine] of this.books.entries()) {
      if (fine === undefined) continue;
      const coarse = new SketchBook(to.sketches, this.pageShift, this.arena);
      this.books[owner] = coarse;
      this.pour(fine, coarse, next);
      this.bytes += coarse.bytes;
      fine.release();
    }
  }

  /** Add the counts of one book to another. @param sketchOf for each sketch of `from`, the one of `into` */
  private pour(from: SketchBook, into: SketchBook, sketchOf: ArrayLike<number>): void {
    const size = 1 << this.pageShift;
    for (let slot = 0; slot < from.slots; slot++) {
      const theirs = from.pageAt(slot);
      if (theirs === 0) continue;
      const ours = into.pageOf(sketchOf[Math.floor(slot / PAGES)]! * PAGES + (slot % PAGES));
      for (let k = 0; k < size; k++) {
        const count = from.countAt(theirs * size + k);
        if (count > 0) into.addAt(ours * size + k, count);
      }
    }
  }

  /**
   * Take over another bank's counts.
   *
   * @param owners for each of its owners, ours
   */
  merge(other: SketchBank, owners: ArrayLike<number>): void {
    this.flush();
    other.flush();
    while (this.level < other.level) this.stepDown();
    const from = other.map;
    const { sketch } = this.map;
    const sketchOf = new Uint32Array(from.sketches);
    for (let i = 0; i < this.samples; i++) sketchOf[from.sketch[i]!] = sketch[i]!;
    for (const [owner, book] of other.books.entries()) {
      if (book === undefined) continue;
      const ours = this.bookOf(owners[owner]!);
      const before = ours.bytes;
      this.pour(book, ours, sketchOf);
      this.bytes += ours.bytes - before;
      book.release();
    }
    this.keepWithinBudget();
  }

  state(): StateRecord {
    this.flush();
    return {
      level: this.level,
      books: Array.from(this.books, (book) => (book ? bookState(book, this.pageShift) : null)),
    };
  }

  restore(from: StateReader, owners: number): void {
    this.level = from.integer("level", 0, this.ladder.length - 1);
    this.placeMap();
    const { sketches } = this.ladder[this.level]!;
    for (const [owner, book] of from.child("books").items(owners).entries()) {
      if (book === null) continue;
      const restored = bookFrom(book, sketches, this.pageShift, this.arena);
      this.books[owner] = restored;
      this.bytes += restored.bytes;
    }
  }

  /** Numbers counted. @param sketch of the map in force */
  count(owner: number, sketch: number): number {
    this.flush();
    const book = this.books[owner];
    let total = 0;
    if (book === undefined) return total;
    for (let p = 0; p < PAGES; p++) total += book.countOfPage(book.pageAt(sketch * PAGES + p));
    return total;
  }

  /** The bucket that holds the number of rank floor(share (n - 1)), its edges and where in it that number lies. */
  private find(owner: number, sketch: number, share: number): Place | undefined {
    this.flush();
    const book = this.books[owner];
    if (book === undefined) return undefined;
    const within = Math.min(1, Math.max(0, share));
    const ranked = book.passes.size === 0 ? this.rank(book, sketch, within) : book.rank(sketch, within);
    if (ranked === undefined) return undefined;
    const { bucket, below, count } = ranked;
    const rank = Math.floor(within * (ranked.total - 1));
    return { low: this.edge(bucket), high: this.edge(bucket + 1), within: (rank - below + 0.5) / count };
  }

  private rank(book: SketchBook, sketch: number, share: number): Ranked | undefined {
    const { rank } = this.placed();
    const directory = book.directoryAt + 4 * PAGES * sketch;
    const bucket = countKernels.findRank(directory, book.countsAt, this.pageShift, share, rank);
    if (bucket < 0) return undefined;
    const { u32 } = kernelMemory.heap;
    const at = rank / 4;
    return { bucket, total: u32[at]!, below: u32[at + 1]!, count: u32[at + 2]! };
  }

  /**
   * Quantile by the harmonic middle of its bucket, which is within `relativeError` of the order statistic of rank
   * floor(share (n - 1)).
   *
   * @param sketch  of the map in force
   * @param share   0..1
   * @returns NaN where nothing was counted; 0 for numbers below 2^-126, which float32 holds with fewer digits
   */
  quantile(owner: number, sketch: number, share: number): number {
    const at = this.find(owner, sketch, share);
    if (at === undefined) return Number.NaN;
    return at.low === 0 ? 0 : (2 * at.low * at.high) / (at.low + at.high);
  }

  /**
   * Quantile with its place inside the bucket taken from its rank: never further off than the bucket is wide, about
   * twice `relativeError`, and far nearer where the bucket holds many smoothly spread numbers.
   */
  smoothQuantile(owner: number, sketch: number, share: number): number {
    const at = this.find(owner, sketch, share);
    if (at === undefined) return Number.NaN;
    return at.low === 0 ? 0 : at.low + at.within * (at.high - at.low);
  }

  /** Largest relative error of `quantile`: half a bucket at its widest, where edges are as 1 + 2^-mantissaBits to 1. */
  get relativeError(): number {
    const width = 2 ** (this.bucketShift - 23);
    return width / (2 + width);
  }

  private edge(bucket: number): number {
    edgeBits[0] = bucket << this.bucketShift;
    // Beyond the largest are infinity and bits of no number.
    return Number.isNaN(edgeValue[0]!) ? LARGEST : Math.min(edgeValue[0]!, LARGEST);
  }
}

/** Rows by owner, by counting. */
function orderByOwner(owner: Int32Array, rows: number): Int32Array {
  let most = 0;
  for (let row = 0; row < rows; row++) if (owner[row]! > most) most = owner[row]!;
  const next = new Int32Array(most + 2);
  for (let row = 0; row < rows; row++) next[owner[row]! + 1]! += 1;
  for (let i = 1; i < next.length; i++) next[i]! += next[i - 1]!;
  const order = new Int32Array(rows);
  for (let row = 0; row < rows; row++) order[next[owner[row]!]!++] = row;
  return order;
}

const edgeValue = new Float32Array(1);
const edgeBits = new Int32Array(edgeValue.buffer);
const LARGEST = 3.4028234663852886e38;
