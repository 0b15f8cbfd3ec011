/** The pages of sketches of one owner, and their state. */
import type { StateReader } from "./reader.ts";
import type { StateRecord } from "./value.ts";

/** The sketches of one owner. */
export interface Book {
  /** (sketches x PAGES) page number, 0 none */
  directory: Uint32Array;
  /** (pages x buckets of a page); page 0 is not used */
  counts: Uint16Array;
  /** pages in use, page 0 included */
  pages: number;
  /** by place in `counts`: how often the count passed 65536 */
  readonly passes: Map<number, number>;
}

export function bookState({ directory, counts, pages, passes }: Book, pageShift: number): StateRecord {
  return {
    directory,
    counts: counts.subarray(0, pages << pageShift),
    passed: Float64Array.from(passes.keys()),
    passes: Float64Array.from(passes.values()),
  };
}

/** @param slots  of its directory */
export function bookFrom(from: StateReader, slots: number, pageShift: number): Book {
  const counts = from.array(Uint16Array, "counts");
  const pages = counts.length / (1 << pageShift);
  if (!Number.isInteger(pages) || pages < 1) {
    throw from.error(`${counts.length} counts are no whole pages of ${1 << pageShift}`, "counts");
  }
  const passed = from.indices(Float64Array, "passed", undefined, 0, counts.length);
  const passes = from.counts(Float64Array, "passes", passed.length);
  return {
    directory: from.indices(Uint32Array, "directory", slots, 0, pages),
    counts,
    pages,
    passes: new Map(Array.from(passed, (place, i) => [place, passes[i]!])),
  };
}
