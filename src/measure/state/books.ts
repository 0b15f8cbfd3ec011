/** The state of the sketches of one owner. */
import type { Arena } from "../../util/kernels/memory.ts";
import { PAGES } from "../kernels/count-sketches.ts";
import { SketchBook } from "../sketch-book.ts";
import type { StateReader } from "./reader.ts";
import type { StateRecord } from "./value.ts";

export function bookState(book: SketchBook, pageShift: number): StateRecord {
  const { passes } = book;
  // Copies: the kernels' memory stays with this thread.
  const counts = Uint16Array.from(book.counts);
  counts.fill(0, 0, 1 << pageShift);
  return {
    directory: Uint32Array.from({ length: book.slots }, (_, slot) => book.pageAt(slot)),
    counts,
    passed: Float64Array.from(passes.keys()),
    passes: Float64Array.from(passes.values()),
  };
}

export function bookFrom(from: StateReader, sketches: number, pageShift: number, arena: Arena): SketchBook {
  const counts = from.array(Uint16Array, "counts");
  const pages = counts.length / (1 << pageShift);
  if (!Number.isInteger(pages) || pages < 1) {
    throw from.error(`${counts.length} counts are no whole pages of ${1 << pageShift}`, "counts");
  }
  const passed = from.indices(Float64Array, "passed", undefined, 0, counts.length);
  const passes = from.counts(Float64Array, "passes", passed.length);
  const directory = from.indices(Uint32Array, "directory", sketches * PAGES, 0, pages);
  const book = new SketchBook(sketches, pageShift, arena, pages);
  book.restore(
    directory,
    counts,
    Array.from(passed, (place, i) => [place, passes[i]!] as const),
  );
  return book;
}
