import { describe, expect, it } from "vitest";
import { Random } from "../../src/simulate/random.ts";

function normals(random: Random, count: number): Float64Array {
  const out = new Float64Array(count);
  random.fillNormals(out, count);
  return out;
}

function correlation(a: Float64Array, b: Float64Array): number {
  return a.reduce((sum, x, i) => sum + x * b[i]!, 0) / a.length;
}

describe("Random", () => {
  it("depends on the seed and every key, and on nothing else", () => {
    const keys = [
      [1, 2, 3],
      [2, 2, 3],
      [1, 3, 3],
      [1, 2, 4],
      [1, 2, 3, 1],
      [-1, 2, 3],
    ] as const;
    const firsts = keys.map(([seed, ...rest]) => Random.of(seed, ...rest).word());
    expect(new Set(firsts).size).toBe(keys.length);
    expect(Random.of(1, 2, 3).word()).toBe(firsts[0]);
    const used = Random.of(9, 9);
    used.normal();
    used.restart(1, 2, 3);
    expect(used.word()).toBe(firsts[0]);
  });

  it("tells seeds above 32 bits apart", () => {
    expect(Random.of(5).word()).not.toBe(Random.of(5 + 2 ** 32).word());
  });

  it("gives neighbouring keys streams that have nothing to do with each other", () => {
    const length = 20_000;
    const first = normals(Random.of(1, 2, 100, 7), length);
    // The correlation of independent deviates has the error 1/sqrt(n); 5 of these.
    for (const key of [
      [101, 7],
      [100, 8],
      [99, 7],
    ] as const) {
      const other = normals(Random.of(1, 2, ...key), length);
      expect(Math.abs(correlation(first, other))).toBeLessThan(5 / Math.sqrt(length));
    }
    const shifted = normals(Random.of(1, 2, 100, 7), length + 1).subarray(1);
    expect(Math.abs(correlation(first, shifted))).toBeLessThan(5 / Math.sqrt(length));
  });

  it("draws the first deviate of ten thousand streams from a normal distribution too", () => {
    const count = 10_000;
    let sum = 0;
    let squares = 0;
    for (let key = 0; key < count; key++) {
      const x = Random.of(20260301, 2, key >> 6, key & 63).normal();
      sum += x;
      squares += x * x;
    }
    expect(Math.abs(sum / count)).toBeLessThan(5 / Math.sqrt(count));
    expect(Math.abs(squares / count - 1)).toBeLessThan(5 * Math.sqrt(2 / count));
  });

  it("gives uniform numbers on 0 <= x < 1", () => {
    const random = Random.of(3);
    const drawn = Float64Array.from({ length: 50_000 }, () => random.uniform());
    expect(Math.min(...drawn)).toBeGreaterThanOrEqual(0);
    expect(Math.max(...drawn)).toBeLessThan(1);
    const mean = drawn.reduce((sum, x) => sum + x, 0) / drawn.length;
    expect(Math.abs(mean - 0.5)).toBeLessThan(5 / Math.sqrt(12 * drawn.length));
  });
});
