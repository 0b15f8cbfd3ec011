import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { cellsWithout, truncated } from "../../src/imaging/cell-weights.ts";
import { MomentGrid } from "../../src/imaging/moment-grid.ts";

const form = { field: 0.01, half: 20, order: 4, weightBound: 1e5, noiseBound: 1e5 };
const sample = fc.record({
  u: fc.double({ min: -1900, max: 1900, noNaN: true }),
  v: fc.double({ min: -1900, max: 1900, noNaN: true }),
  weight: fc.double({ min: 1e-3, max: 100, noNaN: true }),
});
type Sample = { readonly u: number; readonly v: number; readonly weight: number };

function gridOf(samples: readonly Sample[]): MomentGrid {
  const grid = new MomentGrid(form);
  for (const { u, v, weight } of samples) grid.add(u, v, weight, weight / 2);
  return grid;
}

describe("MomentGrid", () => {
  it("is the same to the last bit in whatever order the samples come", () => {
    fc.assert(
      fc.property(fc.array(sample, { maxLength: 60 }), fc.nat(), (samples, seed) => {
        const shuffled = samples
          .map((value, i) => ({ value, key: Math.imul(i + 1, seed | 1) >>> 0 }))
          .sort((a, b) => a.key - b.key)
          .map(({ value }) => value);
        expect(gridOf(shuffled).cells()).toEqual(gridOf(samples).cells());
      }),
    );
  });

  it("is the same for a sample and its conjugate", () => {
    fc.assert(
      fc.property(fc.array(sample, { maxLength: 40 }), (samples) => {
        // Half-way between two cells, rounding decides.
        const inside = samples.filter(({ u, v }) =>
          [u, v].every((x) => Math.abs(((x * form.field) % 1) - 0.5) > 1e-6),
        );
        const turned = inside.map(({ u, v, weight }) => ({ u: -u, v: -v, weight }));
        const [a, b] = [gridOf(inside).cells(), gridOf(turned).cells()];
        expect(b.count).toBe(a.count);
        expect([...b.weight]).toEqual([...a.weight]);
      }),
    );
  });

  it("keeps the sum of weights and noise", () => {
    const samples = Array.from({ length: 50 }, (_, k) => ({
      u: 37 * k - 900,
      v: 13 * k - 300,
      weight: 1 + (k % 7),
    }));
    const cells = gridOf(samples).cells();
    const total = samples.reduce((sum, { weight }) => sum + weight, 0);
    expect(cells.weight.subarray(0, cells.count).reduce((sum, weight) => sum + weight, 0)).toBeCloseTo(
      total,
      8,
    );
    expect(cells.noise.subarray(0, cells.count).reduce((sum, noise) => sum + noise, 0)).toBeCloseTo(
      total / 2,
      8,
    );
  });

  it("counts what lies beyond its edge and keeps the rest", () => {
    const grid = gridOf([
      { u: 5000, v: 0, weight: 1 },
      { u: 0, v: -5000, weight: 1 },
      { u: Number.NaN, v: 0, weight: 1 },
      { u: 100, v: 100, weight: 1 },
    ]);
    expect(grid.outside).toBe(3);
    expect(grid.cells().count).toBe(1);
  });

  it("has no cells when nothing was added", () => {
    expect(gridOf([]).cells().count).toBe(0);
  });

  it("gives cells in order of their place", () => {
    const cells = gridOf([
      { u: 900, v: -300, weight: 1 },
      { u: 0, v: 700, weight: 1 },
      { u: 900, v: 300, weight: 1 },
      { u: 100, v: 0, weight: 1 },
    ]).cells();
    expect([...cells.iu.subarray(0, 4)]).toEqual([0, 1, 9, 9]);
    expect([...cells.iv.subarray(0, 4)]).toEqual([7, 0, -3, 3]);
  });
});

describe("cellsWithout", () => {
  it("leaves what was never added", () => {
    fc.assert(
      fc.property(fc.array(sample, { maxLength: 40 }), fc.array(sample, { maxLength: 40 }), (kept, taken) => {
        const all = gridOf([...kept, ...taken]).cells();
        const left = cellsWithout(all, gridOf(taken).cells());
        const expected = truncated(gridOf(kept).cells(), form.order);
        expect(left.count).toBe(expected.count);
        for (let i = 0; i < left.count; i++) {
          expect([left.iu[i], left.iv[i]]).toEqual([expected.iu[i], expected.iv[i]]);
          expect(left.weight[i]).toBeCloseTo(expected.weight[i]!, 6);
        }
      }),
    );
  });

  it("leaves nothing of the whole", () => {
    const samples = Array.from({ length: 30 }, (_, k) => ({
      u: 60 * k - 900,
      v: 20 * k - 300,
      weight: 0.1 * (k + 1),
    }));
    const cells = gridOf(samples).cells();
    expect(cellsWithout(cells, cells).count).toBe(0);
  });
});
