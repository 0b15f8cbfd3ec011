/** Numbers into the buckets of sketches, and counts of samples by what they are. All addresses are of `kernelMemory`. */
import { kernelsOr } from "../../util/kernels/compiled.ts";
import { kernelMemory } from "../../util/kernels/memory.ts";

/** Samples of a row that are counted row after row, before the next ones: their counts stay in the nearest cache. */
export const LINE = 32;
/** Pages that a sketch may have, 64 of four octaves. */
export const PAGES = 64;
/** A bucket of no number. */
export const NONE = 65535;
/** The most that a count holds. */
const FULL = 65535;

export interface CountKernels {
  /**
   * The buckets of a row.
   *
   * @param bits  address of (samples) int32: bits of float32s >= 0, or negative where there is no number
   * @param to    address of (samples) uint16, out, up to 14 bytes after it writable
   * @param shift from the bits to the bucket
   */
  stageBuckets(bits: number, samples: number, to: number, shift: number): void;
  /**
   * Count the buckets of rows of one owner. A sketch's page is made, zeroed, when a number first falls into it.
   *
   * @param gathered  address of (rows x stride) uint16, the first `samples` of each row used
   * @param stride    from one row to the next
   * @param sketch    address of (samples) int32: the sketch of each sample
   * @param directory address of (sketches x PAGES) int32: page number, 0 none
   * @param counts    address of (capacity x 2^pageShift) uint16; page 0 is not used
   * @param pages     address of an int32: pages in use, page 0 included
   * @param start     0, or what the last call returned
   * @returns where it stopped: at a bucket whose count is full or whose page finds no room; -1 when all is done
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
    start: number,
  ): number;
  /** Add 1 to the counter, uint32, of each sample whose `bits`, int32, are negative. */
  countUnusable(bits: number, samples: number, counters: number): void;
  /** For each kind k of 1 to `kinds` add 1 to counter (k - 1, sample), uint32, where `bits` is -k. */
  countKinds(bits: number, samples: number, kinds: number, counters: number): void;
}

/** A place where `countSketches` stopped: sample of the row, and row. */
export function stopOf(stop: number, rows: number): { readonly sample: number; readonly row: number } {
  const lineOfRow = Math.floor(stop / LINE);
  return { sample: Math.floor(lineOfRow / rows) * LINE + (stop % LINE), row: lineOfRow % rows };
}

export const plainCount: CountKernels = {
  stageBuckets(bits, samples, to, shift) {
    const { i32, u16 } = kernelMemory.heap;
    // A negative number stays negative when shifted, and becomes NONE in 16 bits.
    for (let i = 0; i < samples; i++) u16[to / 2 + i] = i32[bits / 4 + i]! >> shift;
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
    start,
  ) {
    const { i32, u16 } = kernelMemory.heap;
    const mask = (1 << pageShift) - 1;
    let { row, sample } = stopOf(start, rows);
    for (let first = sample - (sample % LINE); first < samples; first += LINE) {
      const end = Math.min(samples, first + LINE);
      for (; row < rows; row++) {
        const from = gathered / 2 + row * stride;
        for (; sample < end; sample++) {
          const bucket = u16[from + sample]!;
          if (bucket === NONE) continue;
          const slot = directory / 4 + i32[sketch / 4 + sample]! * PAGES + (bucket >> pageShift);
          let page = i32[slot]!;
          const stop = ((first / LINE) * rows + row) * LINE + (sample - first);
          if (page === 0) {
            page = i32[pages / 4]!;
            if (page === capacity) return stop;
            i32[pages / 4] = page + 1;
            i32[slot] = page;
            const at = counts / 2 + (page << pageShift);
            u16.fill(0, at, at + (1 << pageShift));
          }
          const place = counts / 2 + ((page << pageShift) | (bucket & mask));
          const count = u16[place]!;
          if (count === FULL) return stop;
          u16[place] = count + 1;
        }
        sample = first;
      }
      row = 0;
      sample = end;
    }
    return -1;
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

export const countKernels: CountKernels = kernelsOr(plainCount);
