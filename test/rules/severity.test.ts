import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { datasetVerdict, scoreOf, severityOf, verdictOf } from "../../src/rules/severity.ts";

describe("severityOf", () => {
  it.each([
    [0, 1, 3, 0],
    [1, 1, 3, 0],
    [2, 1, 3, 0.5],
    [3, 1, 3, 1],
    [9, 1, 3, 1],
    [9, 3, 1, 0],
    [2, 3, 1, 0.5],
    [0, 3, 1, 1],
    [-1, -2, 0, 0.5],
  ])("of %d between caution %d and hold %d is %d", (value, caution, hold, expected) => {
    expect(severityOf(value, caution, hold)).toBe(expected);
  });

  it.each([
    [Number.NaN, 0, 1],
    [0.5, Number.NaN, 1],
    [0.5, 0, Number.NaN],
    [0.5, 1, 1],
    [0.5, 0, Number.POSITIVE_INFINITY],
  ])("of %d between %d and %d is not known", (value, caution, hold) => {
    expect(severityOf(value, caution, hold)).toBeNaN();
  });

  it("is 1 at the hold limit and 0 at the caution limit, exactly, for all limits", () => {
    const limit = fc.double({ min: -1e9, max: 1e9, noNaN: true });
    fc.assert(
      fc.property(limit, limit, limit, (caution, hold, value) => {
        fc.pre(caution !== hold);
        expect(severityOf(hold, caution, hold)).toBe(1);
        expect(severityOf(caution, caution, hold)).toBe(0);
        const severity = severityOf(value, caution, hold);
        expect(severity).toBeGreaterThanOrEqual(0);
        expect(severity).toBeLessThanOrEqual(1);
      }),
    );
  });
});

describe("verdicts", () => {
  it("follow from severity", () => {
    expect([0, 1e-9, 0.999, 1].map(verdictOf)).toEqual(["ready", "caution", "caution", "hold"]);
  });

  it("of a dataset are the worst finding's, or hold below a score of 50", () => {
    expect(datasetVerdict([], 100)).toBe("ready");
    expect(datasetVerdict(["caution"], 80)).toBe("caution");
    expect(datasetVerdict(["caution", "hold"], 99)).toBe("hold");
    expect(datasetVerdict(["caution"], 49.99)).toBe("hold");
    expect(datasetVerdict(["caution"], 50)).toBe("caution");
  });
});

describe("scoreOf", () => {
  it("is 100 without rules and a product with them", () => {
    expect(scoreOf([])).toBe(100);
    expect(
      scoreOf([
        { weight: 0.5, severity: 1 },
        { weight: 0.2, severity: 0.5 },
      ]),
    ).toBeCloseTo(45, 12);
    expect(scoreOf([{ weight: 1, severity: 1 }])).toBe(0);
  });
});
