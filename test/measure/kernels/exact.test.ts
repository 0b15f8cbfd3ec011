/** The compiled addition to exact sums against its plain twin, to the last bit, for doubles of every size. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { EMPTY, type ExactKernels, PIECES, plainExact } from "../../../src/measure/kernels/exact.ts";
import { compiledKernels } from "../../../src/util/kernels/compiled.ts";
import { Arena, kernelMemory } from "../../../src/util/kernels/memory.ts";

const SUMS = 6;
const finite = fc.oneof(
  fc.double({ noNaN: true, noDefaultInfinity: true }),
  fc.double({ min: -10, max: 10, noNaN: true }),
  fc.constantFrom(0, -0, 5e-324, 0.5, 1.5, 2 ** 26, 2 ** 52 + 1, -(2 ** 25) - 0.5),
);
const rows = fc.array(fc.array(finite, { minLength: SUMS + 2, maxLength: SUMS + 2 }), { maxLength: 12 });

function run(kernels: ExactKernels, values: readonly (readonly number[])[]) {
  const arena = new Arena();
  const [top, pieces, row] = [
    arena.require(2 * SUMS),
    arena.require(8 * PIECES * SUMS),
    arena.require(8 * (SUMS + 2)),
  ];
  const { f64 } = kernelMemory.heap;
  const tops = new Int16Array(f64.buffer, top, SUMS).fill(EMPTY);
  f64.fill(0, pieces / 8, pieces / 8 + PIECES * SUMS);
  for (const numbers of values) {
    f64.set(numbers, row / 8);
    // Two groups of three, a number between them left out.
    kernels.addExact(top, pieces, row, 4, 2, 3);
  }
  const result = { top: [...tops], pieces: [...f64.slice(pieces / 8, pieces / 8 + PIECES * SUMS)] };
  arena.release();
  return result;
}

describe("adding to exact sums", () => {
  it("compiled, does what its plain twin does, to the last bit", () => {
    fc.assert(
      fc.property(rows, (values) => {
        expect(run(compiledKernels() as ExactKernels, values)).toEqual(run(plainExact, values));
      }),
      { numRuns: 300 },
    );
  });
});
