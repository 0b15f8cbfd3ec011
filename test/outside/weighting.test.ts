/**
 * Uniform and robust weights against their formula in NumPy (weighting.py) and a worked example
 * (weighting-check-values.json, with its provenance).
 */
import { describe, expect, it } from "vitest";
import type { Weighting } from "../../src/dataset/plan-request.ts";
import { cellFactors, imageNoise } from "../../src/imaging/cell-weights.ts";
import { type FilledCells, MomentGrid } from "../../src/imaging/moment-grid.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface Reference {
  field_rad: number;
  u: number[];
  v: number[];
  weight: number[];
  weightings: { robust: number | null; imaging: number[]; noise: number }[];
  natural_noise: number;
}
const reference = stored<Reference>("weighting");

interface Example {
  entries: {
    inputs: { sample_weights_by_cell: number[][] };
    expected: { uniform: number[][]; robust: Record<string, { f2: number; weights: number[][] }> };
  }[];
}
const [example] = stored<Example>("weighting-check-values").entries;

function gridded(
  u: readonly number[],
  v: readonly number[],
  weight: readonly number[],
  field: number,
): FilledCells {
  const grid = new MomentGrid({ field, half: 60, order: 2, weightBound: 1e4, noiseBound: 1e4 });
  // True weights: weight^2 x variance is the weight.
  for (const [k, value] of weight.entries()) grid.add(u[k]!, v[k]!, value, value);
  return grid.cells();
}

/** Factor of the cell that holds a sample. */
function factorAt(cells: FilledCells, factors: Float64Array, u: number, v: number): number {
  const sign = u < 0 ? -1 : 1;
  let [iu, iv] = [
    Math.floor(sign * u * cells.form.field + 0.5),
    Math.floor(sign * v * cells.form.field + 0.5),
  ];
  if (iu === 0 && iv < 0) [iu, iv] = [0, Math.floor(-sign * v * cells.form.field + 0.5)];
  for (let i = 0; i < cells.count; i++) if (cells.iu[i] === iu && cells.iv[i] === iv) return factors[i]!;
  throw new Error(`no cell ${iu}, ${iv}`);
}

const weightingOf = (robust: number | null): Weighting =>
  robust === null ? { kind: "uniform" } : { kind: "robust", robust };

describe("imaging weights", () => {
  const { u, v, weight, field_rad: field, weightings, natural_noise } = reference;
  const cells = gridded(u, v, weight, field);

  it.each(weightings)("are those of the formula, robust $robust", ({ robust, imaging }) => {
    const factors = cellFactors(cells, weightingOf(robust));
    for (const [k, expected] of imaging.entries()) {
      expect((weight[k]! * factorAt(cells, factors, u[k]!, v[k]!)) / expected).toBeCloseTo(1, 8);
    }
  });

  it.each(weightings)("give the noise of their sums, robust $robust", ({ robust, noise }) => {
    expect(imageNoise(cells, cellFactors(cells, weightingOf(robust))) / noise).toBeCloseTo(1, 8);
  });

  it("give the least noise when natural", () => {
    expect(imageNoise(cells, cellFactors(cells, { kind: "natural" })) / natural_noise).toBeCloseTo(1, 8);
    for (const { noise } of weightings) expect(noise).toBeGreaterThan(natural_noise);
  });

  it("are those of the worked example", () => {
    const { inputs, expected } = example!;
    const places: [number, number, number][] = inputs.sample_weights_by_cell.flatMap((weights, cell) =>
      weights.map((value): [number, number, number] => [1000 * (cell + 1), 0, value]),
    );
    const own = gridded(
      places.map(([a]) => a),
      places.map(([, b]) => b),
      places.map(([, , value]) => value),
      0.01,
    );
    const check = (weighting: Weighting, weights: number[][]) => {
      const factors = cellFactors(own, weighting);
      weights.flat().forEach((value, k) => {
        const [a, b, sample] = places[k]!;
        expect((sample * factorAt(own, factors, a, b)) / value).toBeCloseTo(1, 8);
      });
    };
    check({ kind: "uniform" }, expected.uniform);
    for (const [robust, { weights }] of Object.entries(expected.robust)) {
      check({ kind: "robust", robust: Number(robust) }, weights);
    }
  });
});

itIsFresh("weighting");
