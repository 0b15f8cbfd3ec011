import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  BUCKETS,
  bucketAmplitude,
  RELATIVE_ERROR,
  rawBucket,
  sketchQuantile,
  windowStart,
} from "../../src/measure/buckets.ts";

/** A sketch of amplitudes as the accumulators fill it. */
function sketchOf(amplitudes: readonly number[], start: number): Uint32Array {
  const counts = new Uint32Array(BUCKETS);
  for (const amplitude of amplitudes) {
    const bucket = rawBucket(Math.fround(amplitude * amplitude)) - start;
    counts[Math.min(BUCKETS - 1, Math.max(0, bucket))]! += 1;
  }
  return counts;
}

const inWindow = fc.double({ min: 1 / 100, max: 100, noNaN: true });

describe("buckets", () => {
  it("hold any amplitude of the window within the relative error", () => {
    const start = windowStart(1);
    fc.assert(
      fc.property(inWindow, (amplitude) => {
        const said = bucketAmplitude(start, rawBucket(Math.fround(amplitude * amplitude)) - start);
        // float32 rounding of the power adds at most 2^-25 to the amplitude's relative error.
        expect(Math.abs(said / amplitude - 1)).toBeLessThan(RELATIVE_ERROR + 2 ** -24);
      }),
    );
  });

  it("give the exact quantile of the same rank within the relative error", () => {
    const start = windowStart(1);
    fc.assert(
      fc.property(
        fc.array(inWindow, { minLength: 1, maxLength: 200 }),
        fc.double({ min: 0, max: 1, noNaN: true }),
        (amplitudes, q) => {
          const sorted = [...amplitudes].sort((a, b) => a - b);
          const exact = sorted[Math.floor(q * (sorted.length - 1))]!;
          const said = sketchQuantile(sketchOf(amplitudes, start), 0, start, q);
          expect(Math.abs(said / exact - 1)).toBeLessThan(RELATIVE_ERROR + 2 ** -24);
        },
      ),
    );
  });

  it("know nothing of no amplitudes", () => {
    expect(sketchQuantile(new Uint32Array(BUCKETS), 0, windowStart(1), 0.5)).toBeNaN();
  });

  it.each([0, Number.NaN, Number.POSITIVE_INFINITY, 1e-45, 3e38])(
    "have a window whatever the typical power: %s",
    (power) => {
      const start = windowStart(power);
      expect(start).toBeGreaterThanOrEqual(0);
      expect(bucketAmplitude(start, 0)).toBeGreaterThanOrEqual(0);
    },
  );
});
