import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ExactSums } from "../../src/measure/exact-sums.ts";

const value = fc.oneof(
  fc.double({ noNaN: true, noDefaultInfinity: true, min: -1e300, max: 1e300 }),
  fc.double({ noNaN: true, min: -10, max: 10 }),
  fc.constantFrom(0, -0, 5e-324, 1e-310, 2 ** -1000, 1e300, -1e300),
);

function sumOf(values: readonly number[]): ExactSums {
  const sums = new ExactSums(2);
  for (const one of values) sums.add(1, one);
  return sums;
}

describe("ExactSums", () => {
  it("are the same to the last bit in any order and grouping", () => {
    fc.assert(
      fc.property(fc.array(value, { maxLength: 60 }), fc.nat(), fc.integer(), (values, cut, seed) => {
        const shuffled = values
          .map((one, i) => ({ one, key: Math.sin(seed + 13 * i) }))
          .sort((a, b) => a.key - b.key)
          .map(({ one }) => one);
        const at = cut % (values.length + 1);
        const late = sumOf(shuffled.slice(at));
        late.merge(1, sumOf(shuffled.slice(0, at)), 1);
        expect(Object.is(late.value(1), sumOf(values).value(1))).toBe(true);
      }),
      { numRuns: 500 },
    );
  });

  it("are as good as doubles can be", () => {
    fc.assert(
      fc.property(fc.array(value, { maxLength: 60 }), (values) => {
        // Exact, as whole numbers of the smallest double.
        const truth = values.reduce((sum, one) => sum + inUnits(one), 0n);
        const largest = inUnits(Math.max(0, ...values.map(Math.abs)));
        const error = inUnits(sumOf(values).value(1)) - truth;
        // 2^-52 of the largest a number; below 2^-990 pieces are cut off.
        const bound = (BigInt(values.length + 1) * largest) / 2n ** 52n + 2n ** 84n;
        expect(error <= bound && -error <= bound).toBe(true);
      }),
    );
  });

  it("of nothing are 0", () => {
    expect(new ExactSums(1).value(0)).toBe(0);
  });

  it("keep each sum to itself, and what they hold as they grow", () => {
    const sums = new ExactSums(1);
    sums.add(0, 1e10);
    sums.grow(3);
    sums.add(2, 0.1);
    expect([sums.value(0), sums.value(1), sums.value(2)]).toEqual([1e10, 0, 0.1]);
  });
});

/** A double as a whole number of the smallest one, 2^-1074. */
function inUnits(one: number): bigint {
  const word = new DataView(new ArrayBuffer(8));
  word.setFloat64(0, one);
  const bits = word.getBigUint64(0);
  const exponent = Number((bits >> 52n) & 2047n);
  const fraction = bits & (2n ** 52n - 1n);
  const size = exponent === 0 ? fraction : (fraction + 2n ** 52n) << BigInt(exponent - 1);
  return bits >> 63n === 1n ? -size : size;
}
