import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { medianInPlace, selectKth } from "../../../src/detect/statistics/order.ts";
import { median } from "../../../src/util/statistics.ts";

describe("partial sorting", () => {
  it("finds every order statistic that sorting finds", () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ noNaN: true }), { minLength: 1, maxLength: 60 }),
        fc.nat(),
        (values, at) => {
          const k = at % values.length;
          const sorted = Float64Array.from(values).sort();
          expect(selectKth(Float64Array.from(values), values.length, k)).toBe(sorted[k]);
        },
      ),
    );
  });

  it("gives the median, and leaves what lies beyond the count alone", () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: -5, max: 5 }), { minLength: 1, maxLength: 40 }), (values) => {
        const room = Float64Array.from([...values, 77]);
        expect(medianInPlace(room, values.length)).toBe(median(values));
        expect(room.at(-1)).toBe(77);
      }),
    );
  });

  it.each([
    ["nothing", [], Number.NaN],
    ["one value", [3], 3],
    ["all the same", [2, 2, 2, 2, 2], 2],
    ["a huge offset", [1e15 + 1, 1e15 + 3, 1e15 + 2], 1e15 + 2],
    ["denormals", [5e-324, 1e-323, 0], 5e-324],
  ])("has an answer for %s", (_, values, expected) => {
    expect(medianInPlace(Float64Array.from(values))).toBe(expected);
  });
});
