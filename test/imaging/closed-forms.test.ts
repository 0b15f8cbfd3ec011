import { describe, expect, it } from "vitest";
import { BeamMaker } from "../../src/imaging/beams.ts";
import { type FilledCells, MomentGrid } from "../../src/imaging/moment-grid.ts";

function gridded(
  points: readonly (readonly [number, number, number])[],
  field: number,
  order = 5,
): FilledCells {
  const total = points.reduce((sum, [, , weight]) => sum + weight, 0);
  const extent = Math.max(...points.map(([u, v]) => Math.max(Math.abs(u), Math.abs(v))));
  const half = Math.ceil(extent * field) + 2;
  const grid = new MomentGrid({ field, half, order, weightBound: total * 2, noiseBound: total * 2 });
  for (const [u, v, weight] of points) grid.add(u, v, weight, weight);
  return grid.cells();
}

/** Uniform coverage of a disk by rings of samples, weight by area. */
function disk(q: number, rings: number): [number, number, number][] {
  const points: [number, number, number][] = [];
  for (let ring = 0; ring < rings; ring++) {
    const radius = (q * (ring + 0.5)) / rings;
    const count = 4 * (2 * ring + 3);
    for (let k = 0; k < count; k++) {
      const angle = (Math.PI * (k + 0.5)) / count;
      points.push([radius * Math.cos(angle), radius * Math.sin(angle), radius / count]);
    }
  }
  return points;
}

const natural = { kind: "natural" } as const;

// Closed forms of the beam of simple coverages; values from the zeros of Bessel functions (SciPy), as stored with
// the checks against outside values.
describe("beam of a uniform disk", () => {
  const q = 10_000;
  const cells = gridded(disk(q, 60), 8 / q);
  const made = new BeamMaker(cells.form).make(cells, natural);

  it("has the width of 2 J1(x)/x", () => {
    expect(made.ellipse.major * q).toBeCloseTo(0.705084844527, 3);
    expect(made.ellipse.minor * q).toBeCloseTo(0.705084844527, 3);
  });

  it("has its first sidelobe", () => {
    expect(made.sidelobes.peak).toBeCloseTo(-0.132279487396, 3);
    expect(Math.hypot(made.sidelobes.east, made.sidelobes.north) * q).toBeCloseTo(
      5.13562230184 / 2 / Math.PI,
      2,
    );
  });
});

describe("beam of a ring", () => {
  const q = 10_000;
  const points = Array.from({ length: 720 }, (_, k): [number, number, number] => {
    const angle = (Math.PI * k) / 720;
    return [q * Math.cos(angle), q * Math.sin(angle), 1];
  });
  const cells = gridded(points, 6 / q);
  const made = new BeamMaker(cells.form).make(cells, natural);

  it("has the width of J0", () => {
    expect(made.ellipse.major * q).toBeCloseTo(0.484195191866, 3);
    expect(made.ellipse.minor * q).toBeCloseTo(0.484195191866, 3);
  });

  it("has its first sidelobe, -0.403", () => {
    expect(made.sidelobes.peak).toBeCloseTo(-0.402759395703, 3);
    expect(Math.hypot(made.sidelobes.east, made.sidelobes.north) * q).toBeCloseTo(
      3.83170597021 / 2 / Math.PI,
      2,
    );
  });
});

describe("beam of a regular line", () => {
  // u = 100, 200, ..., 800 wavelengths, with a little width north-south so that the main lobe is closed.
  const points = Array.from({ length: 8 }, (_, k) =>
    [-30, 0, 30].map((v): [number, number, number] => [100 * (k + 1), v, 1]),
  ).flat();

  it("has a grating lobe of the full peak where the field reaches it", () => {
    const cells = gridded(points, 0.024);
    const { sidelobes } = new BeamMaker(cells.form).make(cells, natural);
    expect(sidelobes.peak).toBeCloseTo(1, 3);
    expect(Math.abs(sidelobes.east)).toBeCloseTo(0.01, 5);
    expect(sidelobes.north).toBeCloseTo(0, 4);
  });

  it("has its first negative sidelobe where the field ends before the grating lobe", () => {
    const cells = gridded(points, 0.016);
    const { sidelobes } = new BeamMaker(cells.form).make(cells, natural);
    // Smallest value of the comb's beam (direct sum, stored with the outside checks), on the axis where cos(v m) is 1.
    expect(sidelobes.peak).toBeCloseTo(-0.296023535, 3);
  });
});

describe("main lobe of a Gaussian coverage", () => {
  it("has the width and position angle of the transform of the Gaussian", () => {
    // Axes of the coverage 3000 and 1200 wavelengths, the longer at 30 degrees north through east: the beam's long
    // axis is across it.
    const [long, short, turn] = [3000, 1200, Math.PI / 6];
    const points: [number, number, number][] = [];
    for (let i = -40; i <= 40; i++) {
      for (let j = -40; j <= 40; j++) {
        const [a, b] = [(i / 10) * long, (j / 10) * short];
        const weight = Math.exp(-(a * a) / (2 * long * long) - (b * b) / (2 * short * short));
        points.push([
          a * Math.sin(turn) + b * Math.cos(turn),
          a * Math.cos(turn) - b * Math.sin(turn),
          weight,
        ]);
      }
    }
    const cells = gridded(points, 0.002);
    const { ellipse } = new BeamMaker(cells.form).make(cells, natural);
    const fwhm = Math.sqrt(2 * Math.LN2) / Math.PI;
    expect(ellipse.major / (fwhm / short)).toBeCloseTo(1, 2);
    expect(ellipse.minor / (fwhm / long)).toBeCloseTo(1, 2);
    expect((ellipse.positionAngle * 180) / Math.PI).toBeCloseTo(30 - 90, 1);
  });
});

describe("no samples", () => {
  it("give unknown numbers and no beam", () => {
    const grid = new MomentGrid({ field: 0.01, half: 4, order: 5, weightBound: 0, noiseBound: 0 });
    const made = new BeamMaker(grid.form).make(grid.cells(), natural);
    expect(made.half).toBeNull();
    expect(made.ellipse.major).toBeNaN();
    expect(made.noise).toBeNaN();
  });
});
