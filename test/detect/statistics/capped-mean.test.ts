import { describe, expect, it } from "vitest";
import { CappedMean } from "../../../src/detect/statistics/capped-mean.ts";
import { Random } from "../../../src/simulate/random.ts";

function scaleOf(powers: readonly number[], capped: CappedMean): number {
  const sum = powers.reduce((total, p) => total + Math.min(p, capped.cap), 0);
  return capped.factor(sum / powers.length);
}

describe("the scale of exponential powers from their capped mean", () => {
  const random = Random.of(5, 5);
  const draws = Array.from({ length: 100_000 }, () => -Math.log(1 - random.uniform()));

  it.each([0.05, 0.5, 1, 2, 5])("finds %d of pure noise", (scale) => {
    for (const cap of [1, 3]) {
      const capped = new CappedMean(cap);
      const found = scaleOf(
        draws.map((p) => p * scale),
        capped,
      );
      // Far above the cap little is left to tell by.
      expect(Math.abs(found / scale - 1)).toBeLessThan(scale > 2 * cap ? 0.1 : 0.02);
    }
  });

  it("is as precise as it says", () => {
    const capped = new CappedMean(1);
    const found = Array.from({ length: 400 }, (_, i) => scaleOf(draws.slice(i * 250, (i + 1) * 250), capped));
    const mean = found.reduce((sum, f) => sum + f, 0) / found.length;
    const spread = Math.sqrt(found.reduce((sum, f) => sum + (f - mean) ** 2, 0) / found.length);
    // 400 draws tell a spread to 3.5 %.
    expect(Math.abs(spread / (capped.error / Math.sqrt(250)) - 1)).toBeLessThan(0.12);
  });

  it("is moved by a fifth of outliers no more than the median would be", () => {
    const spoilt = draws.map((p, i) => (i % 5 === 0 ? 1000 : p));
    // Median of the spoilt powers: quantile 5/8 of the good ones.
    const byMedian = -Math.log(1 - 0.625) / Math.LN2;
    expect(scaleOf(spoilt, new CappedMean(1))).toBeLessThan(byMedian + 0.05);
  });

  it("says what it cannot tell", () => {
    const capped = new CappedMean(1);
    expect(capped.factor(Number.NaN)).toBeNaN();
    expect(capped.factor(0)).toBe(0);
    expect(capped.factor(1)).toBe(Number.POSITIVE_INFINITY);
  });
});
