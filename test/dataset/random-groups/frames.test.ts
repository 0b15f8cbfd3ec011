/** Antenna positions: from the Earth's centre or the array's, along which axes, of which hand. */

import { describe, expect, it } from "vitest";
import { card, real } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { greenwichSiderealTime } from "../../../src/geometry/sidereal.ts";
import { hourAngle, uvwOf } from "../../../src/geometry/uvw.ts";
import { SPEED_OF_LIGHT } from "../../../src/util/constants.ts";
import {
  antennaTable,
  DAY,
  fileMaker,
  frequencyTable,
  groupFile,
  type ParameterSpec,
  plainSpec,
} from "../group-file.ts";

type Vector = readonly [number, number, number];

const file = fileMaker();
const DEGREE = Math.PI / 180;
const ROWS = 64;

// An invented array: its centre, and three antennas from it along axes to the local meridian (x), east (y), pole (z).
const LONGITUDE = -67 * DEGREE;
const CENTRE: Vector = [5_900_000 * Math.cos(LONGITUDE), 5_900_000 * Math.sin(LONGITUDE), -2_300_000];
const LOCAL: readonly Vector[] = [
  [0, 0, 0],
  [120, 900, -340],
  [-60, -1500, 800],
];
const turn = ([x, y, z]: Vector, angle: number): Vector => [
  x * Math.cos(angle) - y * Math.sin(angle),
  x * Math.sin(angle) + y * Math.cos(angle),
  z,
];
const PARALLEL = LOCAL.map((offset) => turn(offset, LONGITUDE));
const GEOCENTRIC = PARALLEL.map(([x, y, z]): Vector => [x + CENTRE[0], y + CENTRE[1], z + CENTRE[2]]);
const mirrored = ([x, y, z]: Vector): Vector => [x, -y, z];

/** u, v, w of the true positions, on baselines 1-3 and 2-3. */
function coordinates(sign = 1): ParameterSpec[] {
  return ["UU", "VV", "WW"].map((name, axis) => ({
    name,
    stored: (row) => {
      const [a, b] = [GEOCENTRIC[row % 2]!, GEOCENTRIC[2]!];
      const mjd = DAY + 0.25 + Math.floor(row / 2) / 1024;
      const angle = hourAngle(greenwichSiderealTime(mjd), 123.5 * DEGREE);
      const baseline: Vector = [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
      return (sign * uvwOf(baseline, angle, -30.25 * DEGREE)[axis]!) / SPEED_OF_LIGHT;
    },
  }));
}

interface Written {
  readonly positions: readonly Vector[];
  readonly origin?: Vector;
  readonly frame?: string;
  readonly hand?: string;
  readonly sign?: number;
  readonly noSiderealTime?: boolean;
}

async function open(written: Written) {
  const [x, y, z] = written.origin ?? [0, 0, 0];
  const cards = [card("ARRAYX", real(x)), card("ARRAYY", real(y)), card("ARRAYZ", real(z))];
  if (written.noSiderealTime !== true) {
    cards.push(card("GSTIA0", real(greenwichSiderealTime(DAY) / DEGREE)), card("RDATE", "2024-06-15"));
  }
  if (written.frame !== undefined) cards.push(card("FRAME", written.frame));
  if (written.hand !== undefined) cards.push(card("XYZHAND", written.hand));
  const bytes = groupFile({
    bitpix: -64,
    rows: ROWS,
    parameters: [...coordinates(written.sign), ...plainSpec.parameters.slice(3)],
    tables: [antennaTable({ cards, positions: written.positions }), frequencyTable()],
  });
  const { array, notes } = await openDataset(file(bytes));
  return { array, codes: notes.map(({ code }) => code) };
}

function expectGeocentric(array: Awaited<ReturnType<typeof open>>["array"]): void {
  expect(array.frame).toBe("geocentric");
  array.antennas.forEach(({ position }, i) => {
    for (let axis = 0; axis < 3; axis++) expect(position![axis]).toBeCloseTo(GEOCENTRIC[i]![axis]!, 6);
  });
}

describe("positions from the Earth's centre", () => {
  it("are taken as they are", async () => {
    const { array, codes } = await open({ positions: GEOCENTRIC });
    expectGeocentric(array);
    expect(codes).toEqual([]);
  });

  it("are not added to the position of the array, where both are given", async () => {
    const { array, codes } = await open({ positions: GEOCENTRIC, origin: CENTRE });
    expectGeocentric(array);
    expect(codes).toEqual(["array-position-odd"]);
  });

  it("of (0, 0, 0) are no positions", async () => {
    const { array, codes } = await open({ positions: [[0, 0, 0], ...GEOCENTRIC.slice(1)] });
    expect(array.antennas.map(({ position }) => position === null)).toEqual([true, false, false]);
    expect(codes).toEqual(["missing-antenna-positions"]);
  });
});

describe("small positions without one of the array", () => {
  it("are local, the longitude unknown", async () => {
    const { array, codes } = await open({ positions: LOCAL });
    expect(array.frame).toBe("local");
    expect(array.antennas.map(({ position }) => position)).toEqual(LOCAL);
    expect(codes).toEqual([]);
  });
});

describe("offsets from the position of the array", () => {
  it("along local axes become geocentric", async () => {
    const { array, codes } = await open({ positions: LOCAL, origin: CENTRE });
    expectGeocentric(array);
    expect(codes).toEqual([]);
  });

  it("along geocentric axes become geocentric", async () => {
    const { array, codes } = await open({ positions: PARALLEL, origin: CENTRE, frame: "ITRF" });
    expectGeocentric(array);
    expect(codes).toEqual([]);
  });

  it.each([
    ["local axes in spite of FRAME", LOCAL, "ITRF"],
    ["geocentric axes in spite of no FRAME", PARALLEL, undefined],
  ])("are told by u, v, w where the header misleads: %s", async (_, positions, frame) => {
    const { array, codes } = await open({
      positions,
      origin: CENTRE,
      ...(frame === undefined ? {} : { frame }),
    });
    expectGeocentric(array);
    expect(codes).toEqual(["position-frame-from-uvw"]);
  });

  it("are told whichever way round u, v, w were written", async () => {
    const { array } = await open({ positions: PARALLEL, origin: CENTRE, sign: -1 });
    expectGeocentric(array);
  });

  it("keep what the header says where there is no sidereal time to ask u, v, w with", async () => {
    const { array, codes } = await open({ positions: LOCAL, origin: CENTRE, noSiderealTime: true });
    expectGeocentric(array);
    expect(codes).toEqual([]);
  });
});

describe("left-handed positions", () => {
  it("are turned around where XYZHAND says so", async () => {
    const { array, codes } = await open({ positions: GEOCENTRIC.map(mirrored), hand: "LEFT" });
    expectGeocentric(array);
    expect(codes).toEqual(["left-handed-positions"]);
  });

  it("are found by u, v, w where nothing says so", async () => {
    const { array, codes } = await open({ positions: GEOCENTRIC.map(mirrored) });
    expectGeocentric(array);
    expect(codes).toEqual(["position-frame-from-uvw"]);
  });

  it("that are right-handed in spite of XYZHAND are left as they are", async () => {
    const { array, codes } = await open({ positions: GEOCENTRIC, hand: "LEFT" });
    expectGeocentric(array);
    expect(codes).toEqual(["position-frame-from-uvw"]);
  });
});
