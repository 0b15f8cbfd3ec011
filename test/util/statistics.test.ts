import { describe, expect, it } from "vitest";
import { circularMean, mad, median, modifiedZ, range, robustSigma } from "../../src/util/statistics.ts";

const NASTY = {
  empty: [],
  "one sample": [3],
  "all equal": [2, 2, 2, 2],
  "NaN alone": [Number.NaN, Number.NaN],
  "NaN among numbers": [1, Number.NaN, 3],
  "huge offset": [1e15, 1e15 + 1, 1e15 + 2],
  denormal: [5e-324, 1e-323, 1.5e-323],
} as const;

describe("median and MAD", () => {
  it.each([
    ["empty", Number.NaN, Number.NaN],
    ["one sample", 3, 0],
    ["all equal", 2, 0],
    ["NaN alone", Number.NaN, Number.NaN],
    ["NaN among numbers", 2, 1],
    ["huge offset", 1e15 + 1, 1],
    ["denormal", 1e-323, 5e-324],
  ] as const)("of %s", (name, middle, deviation) => {
    expect(median(NASTY[name])).toBe(middle);
    expect(mad(NASTY[name])).toBe(deviation);
  });

  it("leave their input as it was", () => {
    const values = Float64Array.of(3, 1, 2);
    median(values);
    robustSigma(values);
    expect([...values]).toEqual([3, 1, 2]);
  });
});

describe("range", () => {
  it("is of the numbers alone", () => {
    expect(range([Number.NaN, 4, -1])).toEqual([-1, 4]);
    expect(range(NASTY.empty)).toEqual([Number.NaN, Number.NaN]);
  });
});

describe("modifiedZ", () => {
  it("calls nothing an outlier where all values are equal", () => {
    expect([...modifiedZ(NASTY["all equal"])]).toEqual([0, 0, 0, 0]);
  });

  it("leaves what is not a number so", () => {
    expect([...modifiedZ(NASTY["NaN among numbers"])].map(Number.isNaN)).toEqual([false, true, false]);
  });
});

describe("circularMean", () => {
  it("has no deviation where all angles agree", () => {
    expect(circularMean([1, 1, 1]).deviation).toBeCloseTo(0, 7);
  });

  it("knows nothing of no angles", () => {
    expect(circularMean([Number.NaN])).toEqual({
      mean: Number.NaN,
      resultant: Number.NaN,
      deviation: Number.NaN,
    });
  });
});
