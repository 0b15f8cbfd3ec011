/** The compiled byte order against its plain twin, and both against a DataView, bit by bit. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { type ByteOrderKernels, plainByteOrder } from "../../../src/util/kernels/byte-order.ts";
import { compiledKernels } from "../../../src/util/kernels/compiled.ts";
import { Arena, kernelMemory } from "../../../src/util/kernels/memory.ts";

const KERNELS: [string, ByteOrderKernels][] = [
  ["plain", plainByteOrder],
  ["compiled", compiledKernels() as ByteOrderKernels],
];

/** Any bits: NaNs of every kind among them. */
const shape = fc.record({
  rows: fc.integer({ min: 0, max: 4 }),
  samples: fc.integer({ min: 1, max: 19 }),
  gap: fc.nat(9),
  shift: fc.nat(15),
  seed: fc.nat(),
});

describe.each(KERNELS)("%s byte order", (_, kernels) => {
  it("splits triples of any number, at any place, without losing a bit", () => {
    fc.assert(
      fc.property(shape, ({ rows, samples, gap, shift, seed }) => {
        const arena = new Arena();
        const stride = 12 * samples + gap;
        const from = arena.allocate(rows * stride + shift + 12)! + shift;
        const size = 4 * rows * samples + 4;
        const [real, imag, weight, alone] = [0, 1, 2, 3].map(() => arena.allocate(size)!) as [
          number,
          number,
          number,
          number,
        ];
        const pairs = [arena.allocate(size)!, arena.allocate(size)!];
        const { u8, u32 } = kernelMemory.heap;
        let state = seed;
        for (let i = 0; i < rows * stride; i++) {
          state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
          u8[from + i] = state >>> 24;
        }
        const ends = [real, imag, weight, alone, ...pairs].map((out) => out / 4 + rows * samples);
        for (const end of ends) u32[end] = 77;
        kernels.splitTriples(from, stride, rows, samples, real, imag, weight);
        kernels.splitWeights(from, stride, rows, samples, alone);
        kernels.splitPairs(from, stride, rows, samples, pairs[0]!, pairs[1]!);
        const view = new DataView(u8.buffer);
        for (let row = 0, i = 0; row < rows; row++) {
          for (let k = 0; k < samples; k++, i++) {
            const at = from + row * stride + 12 * k;
            expect([real, imag, weight, alone].map((out) => u32[out / 4 + i])).toEqual(
              [0, 4, 8, 8].map((offset) => view.getUint32(at + offset)),
            );
            const pair = from + row * stride + 8 * k;
            expect(pairs.map((out) => u32[out / 4 + i])).toEqual([
              view.getUint32(pair),
              view.getUint32(pair + 4),
            ]);
          }
        }
        for (const end of ends) expect(u32[end]).toBe(77);
        arena.release();
      }),
    );
  });
});
