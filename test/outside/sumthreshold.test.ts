import { describe, expect, it } from "vitest";
import { scoreOfPower } from "../../src/detect/statistics/normal.ts";
import { runThreshold, sumThreshold } from "../../src/detect/statistics/sum-threshold.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface StoredPlane {
  readonly rows: number;
  readonly columns: number;
  readonly first: number;
  readonly longestTime: number;
  readonly longestFrequency: number;
  readonly scores: readonly number[];
  readonly missing: readonly number[];
  readonly marked: readonly number[];
}
interface Stored {
  readonly planes: readonly StoredPlane[];
  readonly powers: readonly number[];
  readonly scores: readonly number[];
}
interface CheckValues {
  readonly entries: readonly {
    readonly inputs: { readonly chi1: number; readonly rho: number; readonly windows: readonly number[] };
    readonly expected: { readonly chi_N: readonly number[] };
  }[];
}

describe("SumThreshold against its definition in NumPy (sumthreshold.py)", () => {
  itIsFresh("sumthreshold");

  const { planes } = stored<Stored>("sumthreshold");
  it.each(planes.map((plane) => ({ ...plane, name: `${plane.rows} by ${plane.columns}` })))(
    "marks the same samples of a plane of $name",
    ({ rows, columns, first, longestTime, longestFrequency, scores, missing, marked }) => {
      const marks = new Uint8Array(rows * columns);
      for (const i of missing) marks[i] = 2;
      const settings = { first, ratio: 1.5, longestTime, longestFrequency };
      sumThreshold(Float32Array.from(scores), marks, rows, columns, settings);
      const found = Array.from(marks.keys()).filter((i) => marks[i] === 1);
      expect(found.length).toBeGreaterThan(20);
      expect(found).toEqual(marked);
    },
  );

  it("has the thresholds of the paper's formula (check value)", () => {
    const { inputs, expected } = stored<CheckValues>("sumthreshold-check-values").entries[0]!;
    const settings = { first: inputs.chi1, ratio: inputs.rho, longestTime: 1, longestFrequency: 1 };
    for (const [i, length] of inputs.windows.entries()) {
      expect(runThreshold(settings, length)).toBeCloseTo(expected.chi_N[i]!, 9);
    }
  });
});

describe("normal scores of powers against SciPy's norm.isf(exp(-p))", () => {
  const { powers, scores } = stored<Stored>("sumthreshold");
  it("agree to nine digits", () => {
    for (const [i, power] of powers.entries()) {
      expect(Math.abs(scoreOfPower(power) - scores[i]!)).toBeLessThan(1e-9);
    }
  });
});
