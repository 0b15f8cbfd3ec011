/** Numbers into the buckets of sketches, and counts of samples by what they are. All addresses are of `kernelMemory`. */
import { kernelsOr } from "../../util/kernels/compiled.ts";
import { kernelMemory } from "../../util/kernels/memory.ts";

/** Samples of a row that are counted row after row, before the next ones: their counts stay in the nearest cache. */
export const LINE = 32;
/** Pages that a sketch may have, 64 of four octaves. */
export const PAGES = 64;

/**
 * Entry of a directory for a page: bytes from the counts of page -PAGES to where bucket 0 would be counted, if the page
 * that begins at bucket slot x 2^pageShift were as long. Page 0 stands for none, and counts what is no number.
 */
export function entryOf(page: number, slot: number, pageShift: number): number {
  return (page + PAGES - slot) * (2 << pageShift);
}

/** @param slot 0 to PAGES - 1 */
export function pageOfEntry(entry: number, slot: number, pageShift: number): number {
  return entry / (2 << pageShift) + slot - PAGES;
}

export interface CountKernels {
  /**
   * The buckets of a row.
   *
   * @param bits  address of (samples) int32: bits of float32s >= 0, or negative where there is no number
   * @param to    address of (samples) uint16, out, up to 14 bytes after it writable; no number is the last bucket, which
   *              no finite number has
   * @param shift from the bits to the bucket
   */
  stageBuckets(bits: number, samples: number, to: number, shift: number): void;
  /**
   * Count the buckets of rows of one owner. A sketch's page is made, zeroed, when a number first falls into it. A
   * count must not pass 65535 in one call.
   *
   * @param gathered  address of (rows x stride) uint16, the first `samples` of each row used, 62 bytes more readable
   * @param stride    from one row to the next
   * @param sketch    address of (samples) uint32: of each sample the first byte of its sketch in the directory
   * @param directory address of (sketches x PAGES) uint32, entries as `entryOf` makes them
   * @param counts    address of (capacity x 2^pageShift) uint16
   * @param pageShift 6 to 8
   * @param pages     address of an int32: pages in use, page 0 included
   * @param firstLine of the samples, LINE each, that are counted; endLine is one past the last
   * @returns endLine, or the line before which there was no more room for pages
   */
  countSketches(
    gathered: number,
    rows: number,
    stride: number,
    samples: number,
    sketch: number,
    directory: number,
    counts: number,
    pageShift: number,
    pages: number,
    capacity: number,
    firstLine: number,
    endLine: number,
  ): number;
  /**
   * The bucket that holds the number of rank floor(share (n - 1)) of a sketch.
   *
   * @param directory address of the sketch's entries
   * @param out       address of (3) uint32, out: n, numbers in lower buckets, numbers in this one
   * @returns the bucket, or -1 where n is 0
   */
  findRank(directory: number, counts: number, pageShift: number, share: number, out: number): number;
  /** Add 1 to the counter, uint32, of each sample whose `bits`, int32, are negative. */
  countUnusable(bits: number, samples: number, counters: number): void;
  /** For each kind k of 1 to `kinds` add 1 to counter (k - 1, sample), uint32, where `bits` is -k. */
  countKinds(bits: number, samples: number, kinds: number, counters: number): void;
}

export const plainCount: CountKernels = {
  stageBuckets(bits, samples, to, shift) {
    const { i32, u16 } = kernelMemory.heap;
    const last = 0x7fffffff >> shift;
    for (let i = 0; i < samples; i++) u16[to / 2 + i] = (i32[bits / 4 + i]! >> shift) & last;
  },
  countSketches(
    gathered,
    rows,
    stride,
    samples,
    sketch,
    directory,
    counts,
    pageShift,
    pages,
    capacity,
    firstLine,
    endLine,
  ) {
    const { u32, u16 } = kernelMemory.heap;
    const none = (64 << pageShift) - 1;
    const base = (counts - PAGES * (2 << pageShift)) / 2;
    for (let line = firstLine; line < endLine; line++) {
      const end = Math.min(samples, (line + 1) * LINE);
      for (let sample = line * LINE; sample < end; sample++) {
        const own = (directory + u32[sketch / 4 + sample]!) / 4;
        for (const bucket of pagedBuckets(gathered / 2 + sample, rows, stride, pageShift)) {
          const slot = bucket >> pageShift;
          if (u32[own + slot] !== entryOf(0, slot, pageShift)) continue;
          const page = u32[pages / 4]!;
          if (page === capacity) return line;
          u32[pages / 4] = page + 1;
          u32[own + slot] = entryOf(page, slot, pageShift);
          const at = counts / 2 + (page << pageShift);
          u16.fill(0, at, at + (1 << pageShift));
        }
      }
      for (let sample = line * LINE; sample < end; sample++) {
        const own = (directory + u32[sketch / 4 + sample]!) / 4;
        for (let row = 0; row < rows; row++) {
          const bucket = u16[gathered / 2 + row * stride + sample]!;
          if (bucket !== none) u16[base + u32[own + (bucket >> pageShift)]! / 2 + bucket]! += 1;
        }
      }
    }
    return endLine;
  },
  findRank(directory, counts, pageShift, share, out) {
    const { u32, u16 } = kernelMemory.heap;
    const size = 1 << pageShift;
    const pages = Array.from(u32.subarray(directory / 4, directory / 4 + PAGES), (entry, slot) =>
      pageOfEntry(entry, slot, pageShift),
    );
    const placeOf = (page: number) => counts / 2 + page * size;
    const held = pages.map((page) => (page === 0 ? 0 : sumOf(u16, placeOf(page), size)));
    const total = held.reduce((sum, count) => sum + count, 0);
    u32[out / 4] = total;
    if (total === 0) return -1;
    const rank = Math.floor(share * (total - 1));
    let below = 0;
    let slot = 0;
    for (; below + held[slot]! <= rank; slot++) below += held[slot]!;
    let place = placeOf(pages[slot]!);
    for (; below + u16[place]! <= rank; place++) below += u16[place]!;
    u32[out / 4 + 1] = below;
    u32[out / 4 + 2] = u16[place]!;
    return slot * size + place - placeOf(pages[slot]!);
  },
  countUnusable(bits, samples, counters) {
    const { i32 } = kernelMemory.heap;
    for (let i = 0; i < samples; i++) i32[counters / 4 + i]! -= i32[bits / 4 + i]! >> 31;
  },
  countKinds(bits, samples, kinds, counters) {
    const { i32, u32 } = kernelMemory.heap;
    for (let i = 0; i < samples; i++) {
      const kind = -i32[bits / 4 + i]!;
      if (kind >= 1 && kind <= kinds) u32[counters / 4 + (kind - 1) * samples + i]! += 1;
    }
  },
};

/**
 * Buckets whose pages are needed, in the order in which they are made: the lowest and the highest, then, where there
 * are pages between theirs, all.
 */
function pagedBuckets(first: number, rows: number, stride: number, pageShift: number): readonly number[] {
  const { u16 } = kernelMemory.heap;
  const none = (64 << pageShift) - 1;
  const buckets = Array.from({ length: rows }, (_, row) => u16[first + row * stride]!).filter(
    (bucket) => bucket !== none,
  );
  if (buckets.length === 0) return [];
  const [low, high] = [Math.min(...buckets), Math.max(...buckets)];
  return (high >> pageShift) - (low >> pageShift) < 2 ? [low, high] : [low, high, ...buckets];
}

function sumOf(numbers: Uint16Array, first: number, count: number): number {
  let sum = 0;
  for (let i = first; i < first + count; i++) sum += numbers[i]!;
  return sum;
}

export const countKernels: CountKernels = kernelsOr(plainCount);
