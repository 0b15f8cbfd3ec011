/**
 * Control charts against SciPy's normal quantiles, nights drawn in NumPy (control-charts.py), and published tables:
 * Montgomery 2013, Introduction to Statistical Quality Control, 7th ed., tables 9.3 (CUSUM, allowance 1/2) and 9.11 (EWMA,
 * after Lucas & Saccucci 1990); both from memory, and confirmed by the drawn nights.
 */
import { describe, expect, it } from "vitest";
import { cusumRunLength, ewmaRunLength, limitsFor } from "../../src/nightly/charts/control-charts.ts";
import { normalQuantile } from "../../src/nightly/charts/normal-scores.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface Drawn {
  limit: number;
  nights: number;
  error: number;
}
const reference = stored<{ shares: number[]; quantiles: number[]; cusum: Drawn[]; ewma: Drawn[] }>(
  "control-charts",
);

describe("normal quantiles", () => {
  it("are SciPy's", () => {
    reference.shares.forEach((share, i) => {
      expect(Math.abs(normalQuantile(share) - reference.quantiles[i]!)).toBeLessThan(1e-9);
    });
  });
});

describe("nights between false alarms", () => {
  it.each(reference.cusum)(
    "of a CUSUM with limit $limit are those of drawn nights",
    ({ limit, nights, error }) => {
      expect(Math.abs(cusumRunLength(limit) - nights) / error).toBeLessThan(4);
    },
  );

  it.each(reference.ewma)(
    "of an EWMA with limit $limit are those of drawn nights",
    ({ limit, nights, error }) => {
      expect(Math.abs(ewmaRunLength(limit) / nights - 1)).toBeLessThan(0.01 + (4 * error) / nights);
    },
  );

  it("are the published ones", () => {
    expect(cusumRunLength(4)).toBeCloseTo(168, -0.3);
    expect(cusumRunLength(5)).toBeCloseTo(465, -0.3);
    expect(Math.abs(ewmaRunLength(2.814) / 500 - 1)).toBeLessThan(0.02);
  });

  it("are promised by the limits, half of the alarms to each chart", () => {
    const { cusum, ewma } = limitsFor(1000);
    expect(cusumRunLength(cusum) / 2000).toBeCloseTo(1, 2);
    expect(ewmaRunLength(ewma) / 2000).toBeCloseTo(1, 1);
  });
});

itIsFresh("control-charts", 1e-6);
