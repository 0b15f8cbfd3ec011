import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  circularMean,
  mad,
  median,
  modifiedZ,
  range,
  robustSigma,
  standardDeviation,
} from "../../src/util/statistics.ts";

const NAN = Number.NaN;
const HUGE = 1e15;
/** Columns that trip statistics up, and what their median, MAD and standard deviation are. */
const NASTY: Record<string, { values: number[]; median: number; mad: number; deviation: number }> = {
  empty: { values: [], median: NAN, mad: NAN, deviation: NAN },
  "one sample": { values: [3], median: 3, mad: 0, deviation: NAN },
  "all equal": { values: [2, 2, 2, 2], median: 2, mad: 0, deviation: 0 },
  "nothing but NaN": { values: [NAN, NAN], median: NAN, mad: NAN, deviation: NAN },
  "NaN among numbers": { values: [NAN, 1, NAN, 2, 6], median: 2, mad: 1, deviation: Math.sqrt(7) },
  "a huge offset": { values: [HUGE + 1, HUGE + 2, HUGE + 3], median: HUGE + 2, mad: 1, deviation: 1 },
  denormal: { values: [5e-324, 1e-323, 1.5e-323], median: 1e-323, mad: 5e-324, deviation: 0 },
};

describe("nasty columns", () => {
  it.each(Object.entries(NASTY))("%s", (_, column) => {
    const before = [...column.values];
    expect(median(column.values)).toBe(column.median);
    expect(mad(column.values)).toBe(column.mad);
    // A standard deviation squares: of denormals nothing is left.
    const deviation = standardDeviation(column.values);
    if (Number.isNaN(column.deviation)) expect(deviation).toBeNaN();
    else expect(deviation).toBeCloseTo(column.deviation, 12);
    expect(column.values).toEqual(before);
  });
});

describe("the median", () => {
  it("of an even count is the mean of the two in the middle", () => {
    expect(median([4, 1, 3, 2])).toBe(2.5);
    expect(median(Float32Array.of(1, 2))).toBe(1.5);
  });

  it("does not depend on the order, and lies between the extremes", () => {
    fc.assert(
      fc.property(fc.array(fc.double({ min: -1e9, max: 1e9, noNaN: true }), { minLength: 1 }), (values) => {
        const middle = median(values);
        expect(median([...values].reverse())).toBe(middle);
        const [low, high] = range(values);
        expect(middle).toBeGreaterThanOrEqual(low);
        expect(middle).toBeLessThanOrEqual(high);
      }),
    );
  });
});

describe("robust scale", () => {
  it("is not moved by less than half of wild values", () => {
    const tame = [10, 11, 9, 10, 12, 8, 10];
    expect(robustSigma([...tame, 1e12, -1e12])).toBeLessThan(2 * robustSigma(tame));
  });
});

describe("the modified z", () => {
  it("is 0 where values do not differ, and unknown where the value is", () => {
    expect([...modifiedZ([4, 4, 4])]).toEqual([0, 0, 0]);
    expect(modifiedZ([1, NAN, 2, 3])[1]).toBeNaN();
    expect([...modifiedZ([])]).toEqual([]);
  });
});

describe("the mean of angles", () => {
  it("knows that a circle closes", () => {
    expect(circularMean([Math.PI - 0.1, -Math.PI + 0.1]).mean).toBeCloseTo(Math.PI, 12);
    expect(circularMean([0.2]).resultant).toBeCloseTo(1, 14);
  });

  it("turns with the angles", () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -0.5, max: 0.5, noNaN: true }), { minLength: 1, maxLength: 30 }),
        fc.double({ min: -10, max: 10, noNaN: true }),
        (angles, turn) => {
          const still = circularMean(angles);
          const turned = circularMean(angles.map((angle) => angle + turn));
          expect(Math.cos(turned.mean - still.mean - turn)).toBeCloseTo(1, 9);
          expect(turned.resultant).toBeCloseTo(still.resultant, 9);
        },
      ),
    );
  });

  it("is unknown of nothing", () => {
    expect(circularMean([NAN]).mean).toBeNaN();
    expect(circularMean([]).resultant).toBeNaN();
  });
});

describe("the range", () => {
  it("leaves out what is no number", () => {
    expect(range([NAN, 3, -1])).toEqual([-1, 3]);
    expect(range([])).toEqual([NAN, NAN]);
  });
});
