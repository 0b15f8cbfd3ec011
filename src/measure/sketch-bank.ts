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

import type { SketchMap } from "./sharing-ladder.ts";
import { type Book, bookFrom, bookState } from "./state/books.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** Octaves of a page, as a power of two; positive float32s span 256 octaves, so 64 pages. */
const PAGE_OCTAVE_BITS = 2;
const PAGES = 256 >> PAGE_OCTAVE_BITS;
const COUNT_BYTES = 2;
const FULL = 65536;
/** A bucket of no number. */
const NONE = 65535;
const MOST_STAGED_ROWS = 1 << 16;
const GATHERED_ROWS = 128;
/** numbers of 16 bits in a cache line */
const LINE = 32;

/** A number's bucket: its edges, and the number's place between them by rank, 0..1. */
interface Place {
  readonly low: number;
  readonly high: number;
  readonly within: number;
}

export class SketchBank {
  private readonly ladder: readonly SketchMap[];
  private readonly budget: number;
  /** shift from the bits of a float32 to its bucket */
  private readonly bucketShift: number;
  /** shift from a bucket to its page */
  private readonly pageShift: number;
  private readonly books: (Book | undefined)[] = [];
  private readonly samples: number;
  /** buckets of rows not counted yet: counted together, they cost a fraction of the memory traffic */
  private readonly staged: Uint16Array;
  private readonly stagedOwner: Int32Array;
  private stagedRows = 0;
  /** rows of one owner side by side, `stride` apart: an odd number of cache lines, so that they do not collide */
  private readonly gathered: Uint16Array;
  private readonly stride: number;
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
    const rows = Math.max(1, Math.min(MOST_STAGED_ROWS, Math.floor(budget / 8 / COUNT_BYTES / this.samples)));
    this.staged = new Uint16Array(rows * this.samples);
    this.stagedOwner = new Int32Array(rows);
    this.stride = (Math.ceil(this.samples / LINE) | 1) * LINE;
    this.gathered = new Uint16Array(this.stride * Math.min(rows, GATHERED_ROWS));
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
    const { staged, samples, bucketShift } = this;
    if (this.stagedRows === this.stagedOwner.length) this.flush();
    const first = this.stagedRows * samples;
    // A negative number stays negative when shifted, and becomes NONE in 16 bits.
    for (let i = 0; i < samples; i++) staged[first + i] = bits[start + i]! >> bucketShift;
    this.stagedOwner[this.stagedRows++] = owner;
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
    const { samples, staged, gathered } = this;
    const first = row * samples;
    const at = place * this.stride;
    if (samples > 2 * LINE) gathered.set(staged.subarray(first, first + samples), at);
    else for (let i = 0; i < samples; i++) gathered[at + i] = staged[first + i]!;
  }

  private countGathered(owner: number, rows: number): void {
    const { sketch } = this.ladder[this.level]!;
    const { gathered, stride, pageShift, samples } = this;
    const book = this.bookOf(owner);
    const end = rows * stride;
    for (let i = 0; i < samples; i++) {
      const first = sketch[i]! * PAGES;
      // All rows of one sample together: its counts are fetched from memory once.
      let at = i;
      while (at < end) {
        at = countRun(gathered, at, end, stride, book.directory, first, book.counts, pageShift);
        if (at < end) {
          this.countSlowly(book, first, gathered[at]!);
          at += stride;
        }
      }
    }
    this.keepWithinBudget();
  }

  /** Count a bucket whose page may be missing and whose count may be full. */
  private countSlowly(book: Book, first: number, bucket: number): void {
    const slot = first + (bucket >> this.pageShift);
    const page = book.directory[slot]! || this.newPage(book, slot);
    addAt(book, (page << this.pageShift) | (bucket & ((1 << this.pageShift) - 1)), 1);
  }

  private bookOf(owner: number): Book {
    let book = this.books[owner];
    if (book === undefined) {
      book = emptyBook(this.ladder[this.level]!.sketches, this.pageShift);
      this.books[owner] = book;
      this.bytes += this.bytesOf(book);
    }
    return book;
  }

  private bytesOf(book: Book): number {
    return book.directory.byteLength + book.pages * (COUNT_BYTES << this.pageShift);
  }

  private newPage(book: Book, slot: number): number {
    const page = book.pages++;
    const needed = book.pages << this.pageShift;
    if (needed > book.counts.length) {
      const grown = new Uint16Array(Math.max(needed, Math.ceil((book.counts.length * 5) / 4)));
      grown.set(book.counts);
      book.counts = grown;
    }
    book.directory[slot] = page;
    this.bytes += COUNT_BYTES << this.pageShift;
    return page;
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
    this.bytes = 0;
    for (const [owner, fine] of this.books.entries()) {
      if (fine === undefined) continue;
      const coarse = emptyBook(to.sketches, this.pageShift);
      this.books[owner] = coarse;
      this.bytes += this.bytesOf(coarse);
      this.pour(fine, coarse, next);
    }
  }

  /** Add the counts of one book to another. @param sketchOf for each sketch of `from`, the one of `into` */
  private pour(from: Book, into: Book, sketchOf: ArrayLike<number>): void {
    const size = 1 << this.pageShift;
    for (let slot = 0; slot < from.directory.length; slot++) {
      const theirs = from.directory[slot]!;
      if (theirs === 0) continue;
      const target = sketchOf[Math.floor(slot / PAGES)]! * PAGES + (slot % PAGES);
      const ours = into.directory[target]! || this.newPage(into, target);
      for (let k = 0; k < size; k++) {
        const count = countAt(from, theirs * size + k);
        if (count > 0) addAt(into, ours * size + k, count);
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
      if (book !== undefined) this.pour(book, this.bookOf(owners[owner]!), sketchOf);
    }
    this.keepWithinBudget();
  }

  state(): StateRecord {
    this.flush();
    const { level, pageShift } = this;
    return { level, books: Array.from(this.books, (book) => (book ? bookState(book, pageShift) : null)) };
  }

  restore(from: StateReader, owners: number): void {
    this.level = from.integer("level", 0, this.ladder.length - 1);
    const slots = this.ladder[this.level]!.sketches * PAGES;
    for (const [owner, book] of from.child("books").items(owners).entries()) {
      if (book === null) continue;
      const restored = bookFrom(book, slots, this.pageShift);
      this.books[owner] = restored;
      this.bytes += this.bytesOf(restored);
    }
  }

  /** Numbers counted. @param sketch of the map in force */
  count(owner: number, sketch: number): number {
    this.flush();
    const book = this.books[owner];
    let total = 0;
    if (book === undefined) return total;
    for (let p = 0; p < PAGES; p++) total += this.countOfPage(book, book.directory[sketch * PAGES + p]!);
    return total;
  }

  private countOfPage(book: Book, page: number): number {
    if (page === 0) return 0;
    const from = page << this.pageShift;
    const to = from + (1 << this.pageShift);
    const { counts } = book;
    let total = 0;
    for (let place = from; place < to; place++) total += counts[place]!;
    if (book.passes.size > 0) {
      for (let place = from; place < to; place++) total += FULL * (book.passes.get(place) ?? 0);
    }
    return total;
  }

  /** The bucket that holds the number of rank floor(share (n - 1)), its edges and where in it that number lies. */
  private find(owner: number, sketch: number, share: number): Place | undefined {
    const total = this.count(owner, sketch);
    if (total === 0) return undefined;
    const book = this.books[owner]!;
    const rank = Math.floor(Math.min(1, Math.max(0, share)) * (total - 1));
    let below = 0;
    let p = 0;
    let page = 0;
    for (; ; p++) {
      page = book.directory[sketch * PAGES + p]!;
      const count = this.countOfPage(book, page);
      if (below + count > rank) break;
      below += count;
    }
    let k = 0;
    let count = 0;
    for (; ; k++) {
      count = countAt(book, (page << this.pageShift) + k);
      if (below + count > rank) break;
      below += count;
    }
    const bucket = (p << this.pageShift) + k;
    return { low: this.edge(bucket), high: this.edge(bucket + 1), within: (rank - below + 0.5) / count };
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

/**
 * Count buckets at `at`, `at + stride` ... until one needs a new page or fills its count.
 * @returns where that one is, or the first place at or beyond `end`
 */
function countRun(
  gathered: Uint16Array,
  start: number,
  end: number,
  stride: number,
  directory: Uint32Array,
  first: number,
  counts: Uint16Array,
  pageShift: number,
): number {
  const mask = (1 << pageShift) - 1;
  let at = start;
  for (; at < end; at += stride) {
    const bucket = gathered[at]!;
    if (bucket === NONE) continue;
    const page = directory[first + (bucket >> pageShift)]!;
    if (page === 0) return at;
    const place = (page << pageShift) | (bucket & mask);
    const count = counts[place]!;
    if (count === FULL - 1) return at;
    counts[place] = count + 1;
  }
  return at;
}

const edgeValue = new Float32Array(1);
const edgeBits = new Int32Array(edgeValue.buffer);
const LARGEST = 3.4028234663852886e38;

function emptyBook(sketches: number, pageShift: number): Book {
  return {
    directory: new Uint32Array(sketches * PAGES),
    // Noise and steady signals fill three or four pages.
    counts: new Uint16Array((1 + 3 * sketches) << pageShift),
    pages: 1,
    passes: new Map(),
  };
}

function countAt(book: Book, place: number): number {
  const passes = book.passes.size === 0 ? 0 : (book.passes.get(place) ?? 0);
  return book.counts[place]! + passes * FULL;
}

function addAt(book: Book, place: number, count: number): void {
  const sum = book.counts[place]! + count;
  book.counts[place] = sum % FULL;
  const passes = Math.floor(sum / FULL);
  if (passes > 0) book.passes.set(place, (book.passes.get(place) ?? 0) + passes);
}
