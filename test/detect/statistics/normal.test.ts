import { describe, expect, it } from "vitest";
import {
  fillScores,
  HIGHEST_SCORE,
  logUpperTail,
  scoreOfPower,
} from "../../../src/detect/statistics/normal.ts";
import { Random } from "../../../src/simulate/random.ts";

describe("normal scores of powers", () => {
  it("undo the tail they are made of", () => {
    for (const power of [1e-4, 0.01, 0.5, Math.LN2, 2, 7, 30, 400, 1e4]) {
      expect(-logUpperTail(scoreOfPower(power)) / power).toBeCloseTo(1, 9);
    }
  });

  it("are normal with mean 0 and variance 1 for the powers of complex noise", () => {
    const random = Random.of(20260301, 99);
    const count = 200_000;
    const power = Float32Array.from(
      { length: count },
      () => 0.5 * (random.normal() ** 2 + random.normal() ** 2),
    );
    fillScores(power, count);
    const mean = power.reduce((sum, x) => sum + x, 0) / count;
    const variance = power.reduce((sum, x) => sum + (x - mean) ** 2, 0) / count;
    // Standard errors 0.0022 and 0.0032; the lowest step of power has one score.
    expect(Math.abs(mean)).toBeLessThan(0.008);
    expect(Math.abs(variance - 1)).toBeLessThan(0.015);
    const above = power.filter((x) => x > 1.6448536).length / count;
    expect(Math.abs(above - 0.05)).toBeLessThan(0.002);
  });

  it("stay within their bounds whatever the power", () => {
    const power = Float32Array.from([0, 1e-40, 1e38, Number.POSITIVE_INFINITY, Number.NaN]);
    fillScores(power, power.length);
    const [zero, denormal, ...rest] = power;
    expect(zero).toBeLessThan(-2);
    expect(denormal).toBe(zero);
    expect(rest).toEqual([HIGHEST_SCORE, HIGHEST_SCORE, 0]);
  });
});
