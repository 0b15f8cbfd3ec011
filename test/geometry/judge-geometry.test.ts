import { describe, expect, it } from "vitest";
import type { ArrayInfo, Field } from "../../src/dataset/dataset.ts";
import type { GeometryJudgement } from "../../src/geometry/geometry-faults.ts";
import { judgeGeometry, type UvwSamples } from "../../src/geometry/judge-geometry.ts";
import { equinoxDay, precess } from "../../src/geometry/precession.ts";
import { type ArrayOptions, observedArray, threeArms } from "../imaging/observed-array.ts";

const FREQUENCY = 1.4e9;
const RAD = Math.PI / 180;

function judged(
  options: Partial<ArrayOptions>,
  array?: (array: ArrayInfo) => ArrayInfo,
  field?: (field: Field) => Field,
) {
  const { dataset, rows } = observedArray({
    antennas: threeArms(900, 4, 3),
    integrations: 30,
    channels: 1,
    ...options,
  });
  const samples: UvwSamples = {
    antenna1: rows.map((row) => row.antenna1),
    antenna2: rows.map((row) => row.antenna2),
    time: rows.map((row) => 59000 + ((row.hourAngle * 180) / Math.PI + 80) / 360.98564736629),
    u: rows.map((row) => row.u),
    v: rows.map((row) => row.v),
    w: rows.map((row) => row.w),
  };
  const own = dataset.fields[0]!;
  return judgeGeometry(array?.(dataset.array) ?? dataset.array, field?.(own) ?? own, samples, FREQUENCY);
}

function resultOf(...parts: Parameters<typeof judged>): GeometryJudgement {
  const verdict = judged(...parts);
  if (!verdict.judged) throw new Error(verdict.why);
  return verdict.result;
}

const geocentric = (array: ArrayInfo): ArrayInfo => ({ ...array, frame: "geocentric" });

describe("judgeGeometry", () => {
  it("agrees with u, v, w that follow from the tables", () => {
    const result = resultOf({});
    expect(result.fault).toBeNull();
    expect(result.relativeRms).toBeLessThan(1e-6);
    expect(result.signReversed).toBe(false);
    expect(result.offAntenna).toBeNull();
  });

  it("takes the other sign for a convention", () => {
    const result = resultOf({ uvw: ([u, v, w]) => [-u, -v, -w] });
    expect(result.fault).toBeNull();
    expect(result.signReversed).toBe(true);
    expect(result.relativeRms).toBeLessThan(1e-6);
  });

  it.each([
    ["flipped-u", ([u, v, w]: number[]) => [-u!, v!, w!]],
    ["flipped-v", ([u, v, w]: number[]) => [u!, -v!, w!]],
    ["flipped-w", ([u, v, w]: number[]) => [u!, v!, -w!]],
    ["zeroed-w", ([u, v]: number[]) => [u!, v!, 0]],
    ["swapped-u-v", ([u, v, w]: number[]) => [v!, u!, w!]],
    ["swapped-v-w", ([u, v, w]: number[]) => [u!, w!, v!]],
  ])("names %s, whatever ties the hour angle down", (word, change) => {
    for (const frame of [undefined, geocentric]) {
      const result = resultOf({ uvw: (uvw) => change(uvw) as [number, number, number] }, frame);
      expect(result.axisFault).toBe(word);
      expect(result.fault).toBe("axis");
      expect(result.repairedRms).toBeLessThan(1e-6);
    }
  });

  it.each([
    ["metres", 299792458],
    ["wavelengths", FREQUENCY],
    ["nanoseconds", 1e9],
  ])("names %s where seconds are due", (unit, factor) => {
    const result = resultOf({ uvw: ([u, v, w]) => [u * factor, v * factor, w * factor] });
    expect(result.unitFault).toBe(unit);
    expect(result.fault).toBe("unit");
    expect(result.orientation.fit.scale / factor).toBeCloseTo(1, 6);
  });

  it("names the baselines whose antennas are the other way round", () => {
    const result = resultOf({
      uvw: ([u, v, w], row) => (row.antenna1 === 3 && row.antenna2 > 9 ? [-u, -v, -w] : [u, v, w]),
    });
    expect(result.fault).toBe("antenna-order");
    expect(result.reversed).toEqual([
      [3, 10],
      [3, 11],
      [3, 12],
    ]);
    expect(result.repairedRms).toBeLessThan(1e-6);
  });

  it("finds the antenna that is off, and by how many metres", () => {
    // Antenna 5 is 7 m east and 2 m up of what the table says: u, v, w are of where it is.
    const truth = threeArms(900, 4, 3);
    const moved = truth.map((enu, i): [number, number, number] =>
      i === 4 ? [enu[0] + 7, enu[1], enu[2] + 2] : enu,
    );
    const table = observedArray({ antennas: truth }).dataset.array;
    const result = resultOf({ antennas: moved }, () => table);
    expect(result.fault).toBe("antenna-position");
    expect(result.offAntenna).toBe(5);
    expect(result.offsets.get(5)!.distance).toBeCloseTo(Math.hypot(7, 2), 2);
    expect(result.offsets.get(6)!.distance).toBeLessThan(0.01);
  });

  it("finds a clock or longitude that is wrong, where the frame ties the hour angle down", () => {
    const late = resultOf({}, (array) => ({ ...geocentric(array), siderealTimeAtReference: -5 }));
    expect(late.fault).toBe("hour-angle");
    expect((late.orientation.fit.turn * 180) / Math.PI).toBeCloseTo(5, 3);
    const free = resultOf({}, (array) => ({ ...array, siderealTimeAtReference: -5 }));
    expect(free.fault).toBeNull();
  });

  it("accepts u, v, w of the catalogue's equinox and of the date's, and says which", () => {
    expect(resultOf({}).orientation.convention).toBe("catalogue");
    // A catalogue of 1950 whose place, brought to the date, is where the array pointed: 0.9 degrees away.
    const place = precess(80 * RAD, 40 * RAD, 59000, equinoxDay(1950));
    const result = resultOf({}, geocentric, (field) => ({ ...field, ...place, equinox: 1950 }));
    expect(result.orientation.convention).toBe("of-date");
    expect(result.fault).toBeNull();
    expect(result.repairedRms).toBeLessThan(1e-6);
  });

  it("says why it cannot judge", () => {
    expect(judged({}, (array) => ({ ...array, fromTable: false }))).toEqual({
      judged: false,
      why: "there is no antenna table",
    });
    const nowhere = (array: ArrayInfo): ArrayInfo => ({
      ...array,
      antennas: array.antennas.map((antenna) => ({ ...antenna, position: null })),
    });
    expect(judged({}, nowhere)).toMatchObject({ judged: false });
    const together = (array: ArrayInfo): ArrayInfo => ({
      ...array,
      antennas: array.antennas.map((antenna) => ({ ...antenna, position: [1, 2, 3] })),
    });
    expect(judged({}, together)).toMatchObject({ judged: false });
    expect(judged({ uvw: () => [0, 0, 0] })).toMatchObject({
      judged: false,
      why: "u and v are zero throughout",
    });
    expect(judged({ uvw: () => [Number.NaN, 0, 0] })).toMatchObject({ judged: false });
  });
});
