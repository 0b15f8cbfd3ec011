/** Compiled counting and differences against their plain twins, to the last bit. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  type CountKernels,
  entryOf,
  LINE,
  PAGES,
  pageOfEntry,
  plainCount,
} from "../../../src/measure/kernels/count-sketches.ts";
import { type DifferenceKernels, plainDifferences } from "../../../src/measure/kernels/differences.ts";
import { compiledKernels } from "../../../src/util/kernels/compiled.ts";
import { Arena, kernelMemory } from "../../../src/util/kernels/memory.ts";

const compiled = compiledKernels() as CountKernels & DifferenceKernels;
const amplitude = fc.oneof(
  fc.float({ min: 0, max: 1000, noNaN: true }),
  fc.constantFrom(0, 1e-45, 3.4028234663852886e38),
);
/** Bits of amplitudes, or minus a kind. */
const bits = fc.oneof(
  { weight: 6, arbitrary: amplitude.map((a) => new Int32Array(Float32Array.of(a).buffer)[0]!) },
  { weight: 1, arbitrary: fc.integer({ min: -3, max: -1 }) },
);

describe("counting sketches", () => {
  function run(kernels: CountKernels, rows: readonly (readonly number[])[], capacity: number) {
    const samples = rows[0]!.length;
    const sketches = Math.ceil(samples / 2);
    const arena = new Arena();
    const stride = samples + 3;
    const staged = arena.require(2 * stride * rows.length + 64);
    const [row, sketch, pages] = [
      arena.require(4 * samples + 12),
      arena.require(4 * samples),
      arena.require(4),
    ];
    const directory = arena.require(4 * PAGES * sketches);
    const pageShift = 7;
    const counts = arena.require(capacity * (2 << pageShift));
    const kinds = arena.require(4 * 4 * samples);
    const { i32, u16, u32 } = kernelMemory.heap;
    const none = Uint32Array.from({ length: PAGES }, (_, slot) => entryOf(0, slot, pageShift));
    for (let k = 0; k < sketches; k++) u32.set(none, directory / 4 + PAGES * k);
    u16.fill(0, counts / 2, counts / 2 + (capacity << pageShift));
    u32.fill(0, kinds / 4, kinds / 4 + 4 * samples);
    for (let i = 0; i < samples; i++) i32[sketch / 4 + i] = 4 * PAGES * Math.floor(i / 2);
    i32[pages / 4] = 1;
    for (const [k, numbers] of rows.entries()) {
      i32.set(numbers, row / 4);
      kernels.stageBuckets(row, samples, staged + 2 * k * stride, 18);
      kernels.countKinds(row, samples, 3, kinds);
      kernels.countUnusable(row, samples, kinds + 12 * samples);
    }
    const stop = kernels.countSketches(
      staged,
      rows.length,
      stride,
      samples,
      sketch,
      directory,
      counts,
      pageShift,
      pages,
      capacity,
      0,
      Math.ceil(samples / LINE),
    );
    const used = i32[pages / 4]!;
    const ranks = Array.from({ length: sketches }, (_, k) =>
      [0, 0.3, 0.5, 1].map((share) => {
        const bucket = kernels.findRank(directory + 4 * PAGES * k, counts, pageShift, share, row);
        return [bucket, ...u32.slice(row / 4, row / 4 + (bucket < 0 ? 1 : 3))];
      }),
    );
    const result = {
      stop,
      used,
      directory: Array.from(u32.slice(directory / 4, directory / 4 + PAGES * sketches), (entry, slot) =>
        pageOfEntry(entry, slot % PAGES, pageShift),
      ),
      ranks,
      // Page 0 is of no sketch: what is no number is counted there.
      counts: [...u16.slice(counts / 2 + (1 << pageShift), counts / 2 + (used << pageShift))],
      kinds: [...u32.slice(kinds / 4, kinds / 4 + 4 * samples)],
    };
    arena.release();
    return result;
  }

  const rows = fc
    .record({ samples: fc.integer({ min: 1, max: 70 }), rows: fc.integer({ min: 1, max: 6 }) })
    .chain(({ samples, rows }) =>
      fc.array(fc.array(bits, { minLength: samples, maxLength: samples }), {
        minLength: rows,
        maxLength: rows,
      }),
    );

  it("compiled, does what its plain twin does, where pages find room and where they do not", () => {
    let stopped = 0;
    let done = 0;
    fc.assert(
      fc.property(rows, fc.constantFrom(8, 40, 1000), (made, capacity) => {
        const plain = run(plainCount, made, capacity);
        if (plain.stop < Math.ceil(made[0]!.length / LINE)) stopped += 1;
        else done += 1;
        expect(run(compiled, made, capacity)).toEqual(plain);
      }),
      { numRuns: 200 },
    );
    expect(Math.min(stopped, done)).toBeGreaterThan(20);
  });

  it("counts every number once, and each sample that is none by what it is", () => {
    fc.assert(
      fc.property(rows, (made) => {
        const { counts, kinds } = run(compiled, made, 1000);
        const numbers = made.flat().filter((one) => one >= 0).length;
        expect(counts.reduce((sum, count) => sum + count, 0)).toBe(numbers);
        const samples = made[0]!.length;
        for (let kind = 1; kind <= 3; kind++) {
          expect(kinds.slice((kind - 1) * samples, kind * samples)).toEqual(
            made[0]!.map((_, i) => made.filter((row) => row[i] === -kind).length),
          );
        }
        expect(kinds.slice(3 * samples)).toEqual(
          made[0]!.map((_, i) => made.filter((row) => row[i]! < 0).length),
        );
      }),
    );
  });
});

describe("differences between channels", () => {
  const shape = fc.record({
    subbands: fc.integer({ min: 1, max: 2 }),
    channels: fc.integer({ min: 2, max: 21 }),
    polarizations: fc.integer({ min: 1, max: 4 }),
    scale: fc.constantFrom(1, 1e-38, 1e30, Number.NaN),
    seed: fc.nat(),
  });
  const spans = fc.constantFrom([1, 1], [0, 1], [0, 2], [0, 3]);

  it("compiled, are what their plain twin finds", () => {
    fc.assert(
      fc.property(shape, spans, ({ subbands, channels, polarizations, scale, seed }, [reach, after]) => {
        const samples = subbands * channels * polarizations;
        const arena = new Arena();
        const [real, imag, kinds, out] = [0, 1, 2, 3].map(() => arena.require(4 * samples)) as [
          number,
          number,
          number,
          number,
        ];
        const { f32, i32 } = kernelMemory.heap;
        let state = seed;
        const random = () => {
          state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
          return state / 2 ** 31 - 1;
        };
        for (let i = 0; i < samples; i++) {
          f32[real / 4 + i] = scale * random();
          f32[imag / 4 + i] = scale * random();
          // A value that is no number is never usable.
          i32[kinds / 4 + i] = Number.isNaN(scale) || random() > 0.8 ? -2 : 1;
        }
        const [first, second] = [plainDifferences, compiled].map((kernels) => {
          kernels.fillDifferences(real, imag, kinds, subbands, channels, polarizations, reach!, after!, out);
          return [...i32.slice(out / 4, out / 4 + samples)];
        });
        arena.release();
        expect(second).toEqual(first);
      }),
    );
  });
});
