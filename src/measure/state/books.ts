/** The state of the sketches of one owner. */
import type { Arena } from "../../util/kernels/memory.ts";
import { PAGES } from "../kernels/count-sketches.ts";
import { SketchBook } from "../sketch-book.ts";
import type { StateReader } from "./reader.ts";
import type { StateRecord } from "./value.ts";

export function bookState({ directory, counts, passes, pages }: SketchBook): StateRecord {
  // Copies: the kernels' memory stays with this thread. Page 0 is none, and whatever it holds is no state.
  const held = Uint16Array.from(counts);
  held.fill(0, 0, held.length / pages);
  return {
    directory: Uint32Array.from(directory),
    counts: held,
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
  book.pages = pages;
  book.directory.set(directory);
  book.counts.set(counts);
  for (const [i, place] of passed.entries()) book.passes.set(place, passes[i]!);
  return book;
}
