import { describe, expect, it } from "vitest";
import { BeamTransform, beamPixel } from "../../src/imaging/beam-transform.ts";
import { cellFactors } from "../../src/imaging/cell-weights.ts";
import { type FilledCells, MomentGrid } from "../../src/imaging/moment-grid.ts";
import { directBeam, directWeights, type Samples } from "./direct-beam.ts";

/** A small generator with a seed, so that every run sees the same samples. */
function seeded(seed: number): () => number {
  let state = seed;
  return () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 32;
  };
}

function scattered(count: number, seed: number, extent: number): Samples {
  const random = seeded(seed);
  const of = (scale: number) => Array.from({ length: count }, () => (random() - 0.5) * 2 * scale);
  return { u: of(extent), v: of(extent), weight: Array.from({ length: count }, () => 0.5 + random()) };
}

function gridded(samples: Samples, field: number, extent: number, order = 5): FilledCells {
  const total = samples.weight.reduce((sum, weight) => sum + weight, 0);
  const half = Math.ceil(extent * field) + 1;
  const grid = new MomentGrid({ field, half, order, weightBound: total * 2, noiseBound: total * 2 });
  for (const [k, u] of samples.u.entries())
    grid.add(u, samples.v[k]!, samples.weight[k]!, samples.weight[k]!);
  expect(grid.outside).toBe(0);
  return grid.cells();
}

/** Largest |difference| from the direct sum over a lattice of places in the field, the rim included. */
function worst(
  samples: Samples,
  imaging: number[],
  beam: ReturnType<BeamTransform["beam"]>,
  field: number,
  steps = 9,
): number {
  let largest = 0;
  const edge = Math.floor(field / 2 / beam.cell);
  const step = Math.max(1, Math.floor(edge / steps));
  for (let row = -edge; row <= edge; row += step) {
    for (let column = -edge; column <= edge; column += step) {
      if (Math.hypot(row, column) * beam.cell > field / 2) continue;
      const direct = directBeam(samples, imaging, column * beam.cell, row * beam.cell);
      largest = Math.max(largest, Math.abs(direct - beamPixel(beam, column, row)));
    }
  }
  return largest;
}

/** Of the peak, everywhere inside the field. */
const BEAM_TOLERANCE = 1e-3;

describe("BeamTransform", () => {
  it.each([
    ["many samples", 4000, 40, 128],
    ["a snapshot of few baselines", 28, 40, 128],
    ["three samples", 3, 40, 128],
    ["a field of a few beams", 300, 3, 64],
  ])("agrees with a direct sum for %s", (_, count, extentInCells, size) => {
    const field = 0.01;
    const extent = extentInCells / field;
    const samples = scattered(count, 7, extent);
    const cells = gridded(samples, field, extent);
    const transform = new BeamTransform(size);
    for (const weighting of ["natural", "uniform", { robust: 0 }] as const) {
      const imaging = directWeights(samples, field, weighting);
      const plan =
        typeof weighting === "string"
          ? ({ kind: weighting } as const)
          : ({ kind: "robust", ...weighting } as const);
      const beam = transform.beam(cells, cellFactors(cells, plan), size / 2);
      expect(beamPixel(beam, 0, 0)).toBeCloseTo(1, 12);
      expect(worst(samples, imaging, beam, field)).toBeLessThan(BEAM_TOLERANCE);
    }
  });

  it.each([
    [2, 60_000],
    [3, 8000],
  ])("agrees with moments up to order %i where samples are many", (order, count) => {
    const field = 0.01;
    const extent = 60 / field;
    const samples = scattered(count, 11, extent);
    const cells = gridded(samples, field, extent, order);
    for (const weighting of ["natural", "uniform"] as const) {
      const imaging = directWeights(samples, field, weighting);
      const beam = new BeamTransform(256).beam(cells, cellFactors(cells, { kind: weighting }), 128);
      expect(worst(samples, imaging, beam, field, 4)).toBeLessThan(BEAM_TOLERANCE);
    }
  });
});
