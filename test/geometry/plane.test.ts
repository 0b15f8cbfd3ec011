import { describe, expect, it } from "vitest";
import { solveDifferences } from "../../src/geometry/antenna-coordinates.ts";
import { arrayHeights, type PlaneMoment } from "../../src/geometry/array-plane.ts";
import { enuToLocal, type Vector3 } from "../../src/geometry/earth.ts";
import { fitArrayPlane, fitPlane, heightOff, planeRest } from "../../src/geometry/plane.ts";
import { uvwOf } from "../../src/geometry/uvw.ts";

const RAD = Math.PI / 180;
const LATITUDE = 34 * RAD;
/** The invented array of the geometry check values: east, north, up, metres. */
const ANTENNAS: readonly Vector3[] = [
  [0, 0, 0],
  [100, 0, 0],
  [-50, 86.60254, 0],
  [30, -250, 5],
  [-800, 450, -12],
  [1200, 900, 3],
];

function spacings(antennas: readonly Vector3[], hourAngle: number, declination: number) {
  const local = antennas.map((enu) => enuToLocal(enu, LATITUDE));
  const first: number[] = [];
  const second: number[] = [];
  const rows: Vector3[] = [];
  for (let i = 0; i < local.length; i++) {
    for (let j = i + 1; j < local.length; j++) {
      const [a, b] = [local[i]!, local[j]!];
      first.push(i);
      second.push(j);
      rows.push(uvwOf([a[0] - b[0], a[1] - b[1], a[2] - b[2]], hourAngle, declination));
    }
  }
  const column = (k: 0 | 1 | 2) => Float64Array.from(rows, (row) => row[k]);
  return {
    graph: { antennas: local.length, first: Int32Array.from(first), second: Int32Array.from(second) },
    u: column(0),
    v: column(1),
    w: column(2),
    weight: new Float64Array(rows.length).fill(1),
  };
}

describe("fitPlane", () => {
  // Reference values of the geometry check sheet, plane-coplanar: a = -tan z sin q, b = -tan z cos q.
  it("finds the plane of a flat array exactly", () => {
    const flat = ANTENNAS.map(([east, north]): Vector3 => [east, north, 0]);
    const { u, v, w, weight } = spacings(flat, 37.5 * RAD, 22 * RAD);
    const plane = fitPlane(u, v, w, weight);
    expect(plane.determined).toBe(true);
    expect(plane.a).toBeCloseTo(-0.615993347488, 9);
    expect(plane.b).toBeCloseTo(-0.33209691662, 9);
    expect(planeRest(plane, u, v, w, weight).rms).toBeCloseTo(0, 9);
    expect(Math.atan(Math.hypot(plane.a, plane.b)) / RAD).toBeCloseTo(34.9847719058, 6);
  });

  // plane-nearly-coplanar, by numpy.linalg.lstsq
  it("finds the plane of an array with heights by least squares", () => {
    const { u, v, w, weight } = spacings(ANTENNAS, 37.5 * RAD, 22 * RAD);
    const plane = fitPlane(u, v, w, weight);
    expect(plane.a).toBeCloseTo(-0.598597750805, 9);
    expect(plane.b).toBeCloseTo(-0.339900477115, 9);
    const rest = planeRest(plane, u, v, w, weight);
    expect(rest.rms).toBeCloseTo(1.81577755417, 8);
    expect(rest.largest).toBeCloseTo(3.60670741748, 8);
    expect(rest.wRms).toBeCloseTo(537.050870065, 6);
  });

  it("says when all spacings lie on a line, and takes the smallest plane through them", () => {
    const line = [0, 100, 250, 600].map((east): Vector3 => [east, 0, 0]);
    const { u, v, w, weight } = spacings(line, 20 * RAD, 40 * RAD);
    const plane = fitPlane(u, v, w, weight);
    expect(plane.determined).toBe(false);
    expect(planeRest(plane, u, v, w, weight).rms).toBeCloseTo(0, 9);
    // Along the line, and nothing across it.
    expect(plane.a * -v[0]! + plane.b * u[0]!).toBeCloseTo(0, 9);
  });

  it("has no plane without samples", () => {
    const none = new Float64Array(0);
    expect(fitPlane(none, none, none, none)).toEqual({ a: 0, b: 0, determined: false });
    expect(planeRest({ a: 0, b: 0, determined: false }, none, none, none, none).rms).toBeNaN();
  });
});

describe("fitArrayPlane", () => {
  const positions = Array.from({ length: 12 }, (_, k) => {
    const [x, y] = [900 * Math.sin(2.4 * k) * Math.sqrt(k), 900 * Math.cos(2.4 * k) * Math.sqrt(k)];
    return [x, y, 0.3 * x - 0.5 * y + 7] as const;
  });
  const column = (rows: readonly (readonly number[])[], k: number) =>
    Float64Array.from(rows, (row) => row[k]!);

  it("is not moved by antennas that are off by any amount", () => {
    const lifted = positions.map((row, i) => (i === 5 ? [row[0], row[1], row[2] + 400] : [...row]));
    lifted[9] = [lifted[9]![0]!, lifted[9]![1]!, lifted[9]![2]! - 50];
    const plane = fitArrayPlane(column(lifted, 0), column(lifted, 1), column(lifted, 2))!;
    expect(plane.a).toBeCloseTo(0.3, 6);
    expect(plane.b).toBeCloseTo(-0.5, 6);
    expect(heightOff(plane, lifted[5]![0]!, lifted[5]![1]!, lifted[5]![2]!)).toBeCloseTo(
      400 / Math.sqrt(1.34),
      4,
    );
    expect(heightOff(plane, lifted[9]![0]!, lifted[9]![1]!, lifted[9]![2]!)).toBeCloseTo(
      -50 / Math.sqrt(1.34),
      4,
    );
  });

  it("needs antennas enough, and not all on a line", () => {
    const few = positions.slice(0, 4);
    expect(fitArrayPlane(column(few, 0), column(few, 1), column(few, 2))).toBeNull();
    const line = Array.from({ length: 8 }, (_, k) => [100 * k, 200 * k, 5 * k]);
    expect(fitArrayPlane(column(line, 0), column(line, 1), column(line, 2))).toBeNull();
  });
});

describe("arrayHeights", () => {
  const heights = [0.4, -0.2, 0.1, -0.3, 62, 0.2, 0, -0.1, 0.3];
  const antennas = heights.map((up, k): Vector3 => {
    const radius = 60 * (k + 1) ** 1.5;
    return [radius * Math.sin(2.1 * k), radius * Math.cos(2.1 * k), up];
  });
  const moment = (hour: number, declination: number): PlaneMoment => ({
    ...spacings(antennas, hour, declination),
    hourAngle: hour,
  });

  it("names the antenna on the ridge and its height, whatever the direction of the source", () => {
    for (const declination of [-20, 10, 60]) {
      const moments = [-2, -1, 0.5, 2].map((hour) => moment(hour * 15 * RAD, declination * RAD));
      const found = arrayHeights(antennas.length, moments, declination * RAD)!;
      expect(found.heights.indexOf(Math.max(...found.heights))).toBe(4);
      expect(Math.abs(found.heights[4]! / 62 - 1)).toBeLessThan(0.01);
      for (const [i, height] of found.heights.entries())
        if (i !== 4) expect(Math.abs(height)).toBeLessThan(1);
    }
  });

  it("finds the direction in which the array is coplanar: its zenith", () => {
    const found = arrayHeights(antennas.length, [moment(0.3, 0.2), moment(-0.5, 0.2)], 0.2)!;
    expect(found.declination / RAD).toBeCloseTo(34, 1);
    expect(found.hourAngle / RAD).toBeCloseTo(0, 1);
  });

  it("is unknown with too few antennas", () => {
    const few = spacings(antennas.slice(0, 3), 0, 0.2);
    expect(arrayHeights(3, [{ ...few, hourAngle: 0 }], 0.2)).toBeNull();
    expect(arrayHeights(3, [], 0.2)).toBeNull();
  });
});

describe("solveDifferences", () => {
  // The antenna decomposition of the check sheet: 4 antennas, all baselines, equal weights, numpy.linalg.lstsq.
  it("gives antenna quantities by least squares", () => {
    const graph = {
      antennas: 4,
      first: Int32Array.of(0, 0, 0, 1, 1, 2),
      second: Int32Array.of(1, 2, 3, 2, 3, 3),
    };
    const phases = Float64Array.of(-20, 35, -60, 67, -40, -95);
    const [solved] = solveDifferences(graph, new Float64Array(6).fill(1), [phases])!;
    const relative = [...solved!].map((value) => value - solved![0]!);
    for (const [i, value] of [0, 23, -38, 60].entries()) expect(relative[i]).toBeCloseTo(value, 9);
    expect(solved!.reduce((sum, value) => sum + value, 0)).toBeCloseTo(0, 9);
  });

  it("leaves out what has no weight, and antennas without a pair", () => {
    const graph = { antennas: 4, first: Int32Array.of(0, 0, 1), second: Int32Array.of(1, 2, 2) };
    const [solved] = solveDifferences(graph, Float64Array.of(1, 1, 0), [Float64Array.of(3, 5, Number.NaN)])!;
    expect(solved![0]! - solved![1]!).toBeCloseTo(3, 9);
    expect(solved![0]! - solved![2]!).toBeCloseTo(5, 9);
    expect(solved![3]).toBe(0);
  });

  it("cannot tell groups of antennas that no baseline joins", () => {
    const graph = { antennas: 4, first: Int32Array.of(0, 2), second: Int32Array.of(1, 3) };
    expect(solveDifferences(graph, Float64Array.of(1, 1), [Float64Array.of(1, 2)])).toBeNull();
    expect(solveDifferences(graph, Float64Array.of(0, 0), [Float64Array.of(1, 2)])).toBeNull();
  });
});
