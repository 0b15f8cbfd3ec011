import { describe, expect, it } from "vitest";
import {
  spectralKurtosis,
  spectralKurtosisLimits,
  spectralKurtosisMoments,
  spectralKurtosisVariance,
} from "../../src/detect/statistics/spectral-kurtosis.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface Exact {
  readonly count: number;
  readonly shape: number;
  readonly variance: number;
  readonly skewness: number;
  readonly kurtosis: number;
}
interface Simulated {
  readonly count: number;
  readonly draws: number;
  readonly lower01: number;
  readonly upper01: number;
}
interface Limits {
  readonly M: number;
  readonly N: number;
  readonly d: number;
  readonly variance: number;
  readonly lower_3sigma: number;
  readonly upper_3sigma: number;
}
interface Entry {
  readonly id: string;
  readonly inputs: { readonly P: readonly number[]; readonly N: number; readonly d: number };
  readonly expected: unknown;
}

const checks = stored<{ entries: readonly Entry[] }>("spectral-kurtosis-check-values").entries;
const { exact, simulated } = stored<{ exact: Exact[]; simulated: Simulated[] }>("spectral-kurtosis");

describe("spectral kurtosis", () => {
  // Quantiles of random draws: the generator is the same in every NumPy, but be kind to the last digits.
  itIsFresh("spectral-kurtosis", 1e-6);

  it("has the moments that exact rational arithmetic gives (spectral-kurtosis.py)", () => {
    for (const { count, shape, variance, skewness, kurtosis } of exact) {
      const moments = spectralKurtosisMoments(count, shape);
      expect(moments.variance / variance).toBeCloseTo(1, 10);
      expect(moments.skewness).toBeCloseTo(skewness, 5);
      expect(moments.kurtosis).toBeCloseTo(kurtosis, 4);
    }
  });

  it("has the limits of the Pearson curve with those moments (check values, Nita & Gary 2010)", () => {
    const table = checks.find(({ id }) => id === "spectral-kurtosis")!.expected as readonly Limits[];
    expect(table).toHaveLength(10);
    for (const { M, N, d, variance, lower_3sigma, upper_3sigma } of table) {
      expect(spectralKurtosisVariance(M, N * d) / variance).toBeCloseTo(1, 9);
      const { lower, upper } = spectralKurtosisLimits(M, N * d);
      expect(Math.abs(lower - lower_3sigma)).toBeLessThan(0.0005);
      expect(Math.abs(upper - upper_3sigma)).toBeLessThan(0.0005);
    }
  });

  it("is crossed by simulated noise as often as its limits say (spectral-kurtosis.py)", () => {
    for (const { count, lower01, upper01 } of simulated) {
      const { lower, upper } = spectralKurtosisLimits(count, 1, 0.01);
      const sigma = Math.sqrt(spectralKurtosisVariance(count));
      // The curve matches four moments, not the distribution: a few hundredths of a sigma.
      expect(Math.abs(lower - lower01)).toBeLessThan(0.04 * sigma);
      expect(Math.abs(upper - upper01)).toBeLessThan(0.04 * sigma);
    }
  });

  it("is what the formula gives in the worked example (check value)", () => {
    const { inputs, expected } = checks.find(({ id }) => id === "spectral-kurtosis-example")!;
    const sum = inputs.P.reduce((total, p) => total + p, 0);
    const square = inputs.P.reduce((total, p) => total + p * p, 0);
    expect(spectralKurtosis(sum, square, inputs.P.length, inputs.N * inputs.d)).toBeCloseTo(
      expected as number,
      10,
    );
  });
});
