import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { smoothSize } from "../../src/imaging/advice.ts";

describe("smoothSize", () => {
  it("is the smallest even product of 2, 3 and 5 that is large enough", () => {
    expect([1, 2, 3, 7, 271, 289, 1025, 4097].map(smoothSize)).toEqual([2, 2, 4, 8, 288, 300, 1080, 4320]);
  });

  it("leaves out no smaller one", () => {
    const isSmooth = (size: number) => {
      let rest = size;
      for (const prime of [2, 3, 5]) while (rest % prime === 0) rest /= prime;
      return rest === 1;
    };
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 20_000 }), (pixels) => {
        const size = smoothSize(pixels);
        expect(size).toBeGreaterThanOrEqual(pixels);
        expect(size % 2).toBe(0);
        expect(isSmooth(size)).toBe(true);
        for (let smaller = pixels + (pixels % 2); smaller < size; smaller += 2) {
          expect(smaller > 0 && isSmooth(smaller)).toBe(false);
        }
      }),
    );
  });

  it("answers at once for sizes that no image has", () => {
    expect(smoothSize(1e12)).toBeGreaterThanOrEqual(1e12);
  });
});
