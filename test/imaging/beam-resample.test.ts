import { describe, expect, it } from "vitest";
import { finerMiddle, interpolatedPixel } from "../../src/imaging/beam-resample.ts";
import type { HalfBeam } from "../../src/imaging/beam-transform.ts";
import { BeamMaker, pictureOf } from "../../src/imaging/beams.ts";
import { MomentGrid } from "../../src/imaging/moment-grid.ts";

/** Cosines of spatial frequencies up to 1/3 of a pixel, as a beam sampled 3 times a period has. */
const WAVES = [
  [0, 0, 0.3],
  [0.31, 0.02, 0.2],
  [-0.12, 0.3, 0.3],
  [0.2, -0.24, 0.2],
] as const;
const exact = (column: number, row: number) =>
  WAVES.reduce((sum, [u, v, weight]) => sum + weight * Math.cos(2 * Math.PI * (u * column + v * row)), 0);
const reach = 30;
const beam: HalfBeam = {
  reach,
  cell: 1,
  pixels: Float64Array.from({ length: (reach + 1) * (2 * reach + 1) }, (_, at) =>
    exact((at % (2 * reach + 1)) - reach, Math.floor(at / (2 * reach + 1))),
  ),
};

describe("a beam between its pixels", () => {
  it("is that of its waves to a few thousandths", () => {
    for (const [column, row] of [
      [0.5, 0.5],
      [3.25, -7.1],
      [-11.9, 4.6],
      [8, 0.01],
    ] as const) {
      expect(Math.abs(interpolatedPixel(beam, column, row) - exact(column, row))).toBeLessThan(2e-3);
    }
    expect(interpolatedPixel(beam, 5, -3)).toBeCloseTo(exact(5, -3), 12);
  });

  it("is the same pixel by pixel and as a finer picture", () => {
    const middle = 20;
    const fine = finerMiddle(beam, middle, 3);
    for (let row = 0; row <= 2 * middle; row += 7) {
      for (let column = 0; column <= 2 * middle; column += 5) {
        const one = interpolatedPixel(beam, (column - middle) / 3, (row - middle) / 3);
        expect(fine[row * (2 * middle + 1) + column]).toBeCloseTo(one, 6);
      }
    }
    expect(fine[middle * (2 * middle + 1) + middle]).toBeCloseTo(1, 6);
  });
});

describe("the picture of a beam", () => {
  it("has its peak in the middle, south first and east to the left", () => {
    // A coverage that is long to the north-east makes a beam that is long to the north-west.
    const grid = new MomentGrid({ field: 0.01, half: 30, order: 5, weightBound: 1e4, noiseBound: 0 });
    for (let k = -40; k <= 40; k++) {
      for (let j = -10; j <= 10; j++)
        grid.add(30 * k + 15 * j, 30 * k - 15 * j, Math.exp(-(k * k) / 800 - (j * j) / 50), 0);
    }
    const cells = grid.cells();
    const made = new BeamMaker(cells.form).make(cells, { kind: "natural" });
    expect(made.ellipse.positionAngle).toBeLessThan(0);
    const { size, pixels, cellArcsec } = pictureOf(made, "natural")!;
    const middle = (size - 1) / 2;
    const at = (east: number, north: number) => pixels[(middle + north) * size + middle - east]!;
    expect(at(0, 0)).toBeCloseTo(1, 4);
    expect(at(-6, 6)).toBeGreaterThan(at(6, 6) + 0.02);
    expect(at(6, -6)).toBeCloseTo(at(-6, 6), 5);
    expect(cellArcsec * (Math.PI / 180 / 3600)).toBeLessThanOrEqual(made.ellipse.minor / 4);
  });
});
