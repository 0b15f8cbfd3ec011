/**
 * Sidereal time, Earth frames and u, v, w against ERFA and Astropy (geometry.py), and against published values: Meeus
 * 1998, Astronomical Algorithms, examples 12.a and 12.b, and the GSTIA0 of a FITS registry sample header
 * (geometry-check-values.json, with the provenance of each).
 */
import { describe, expect, it } from "vitest";
import type { ArrayInfo } from "../../src/dataset/dataset.ts";
import {
  enuToLocal,
  geocentricToGeodetic,
  geodeticToGeocentric,
  localToGeocentric,
  type Vector3,
} from "../../src/geometry/earth.ts";
import {
  greenwichSiderealTime,
  SIDEREAL_DEGREES_PER_DAY,
  siderealTimeOf,
} from "../../src/geometry/sidereal.ts";
import { horizontalOf, hourAngle, uvwOf, uvwPerHourAngle } from "../../src/geometry/uvw.ts";
import { MJD_EPOCH_JD, mjdFromDate } from "../../src/util/dates.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

const DEGREE = Math.PI / 180;
/** A double MJD resolves 0.6 microseconds, 5e-11 rad of the sky's turning. */
const SIDEREAL_TOLERANCE = 1e-10;

interface Reference {
  sidereal: { mjd_ut1: number; gmst_rad: number }[];
  geodetic: { latitude_deg: number; longitude_deg: number; height_m: number; geocentric_m: Vector3 }[];
  horizontal: {
    latitude_deg: number;
    hour_angle_deg: number;
    declination_deg: number;
    azimuth_rad: number;
    elevation_rad: number;
    parallactic_rad: number;
  }[];
  uvw: {
    sidereal_rad: number;
    right_ascension_rad: number;
    declination_rad: number;
    baseline_m: Vector3;
    uvw_m: Vector3;
  }[];
}
const reference = stored<Reference>("geometry");

interface Entry {
  id: string;
  inputs: Record<string, number | string | Record<string, Vector3>>;
  expected: unknown;
  tolerance: { abs?: number; rel?: number };
}
const sheet = new Map(
  stored<{ entries: Entry[] }>("geometry-check-values").entries.map((entry) => [entry.id, entry]),
);
function sheetEntry(id: string): Entry {
  const entry = sheet.get(id);
  if (entry === undefined) throw new Error(`no check value ${id}`);
  return entry;
}

function expectVector(found: Vector3, expected: readonly number[], tolerance: number): void {
  expected.forEach((value, i) => {
    expect(Math.abs(found[i]! - value)).toBeLessThan(tolerance);
  });
}

describe("sidereal time", () => {
  itIsFresh("geometry");

  it("agrees with ERFA's gmst82 from 1900 to 2100", () => {
    for (const { mjd_ut1, gmst_rad } of reference.sidereal) {
      expect(Math.abs(greenwichSiderealTime(mjd_ut1) - gmst_rad)).toBeLessThan(SIDEREAL_TOLERANCE);
    }
  });

  it("agrees with Meeus's examples and a FITS registry header", () => {
    const ids = [...sheet.keys()].filter((id) => id.startsWith("gmst82"));
    expect(ids).toHaveLength(8);
    for (const id of ids) {
      const { expected, tolerance } = sheetEntry(id);
      const degrees = greenwichSiderealTime(mjdUt1Of(sheetEntry(id).inputs)) / DEGREE;
      expect(Math.abs(degrees - (expected as number)), id).toBeLessThan(tolerance.abs!);
    }
  });

  it("turns at the published rate", () => {
    expect(SIDEREAL_DEGREES_PER_DAY).toBe(sheetEntry("gmst-solar-rate").expected);
  });

  it("follows the dataset's own GSTIA0 and DEGPDY", () => {
    // Apparent time as a real 2017 file holds it; ERFA's rate carries it to the next evening.
    const { expected, inputs } = sheetEntry("gstia0-real-2017");
    const referenceDay = (inputs.jd_utc as number) - MJD_EPOCH_JD;
    const array = tableOf({ siderealTimeAtReference: expected as number, referenceDay });
    expect(siderealTimeOf(array, referenceDay) / DEGREE).toBeCloseTo(expected as number, 10);
    const later = siderealTimeOf(array, referenceDay + 1.75);
    const mean = greenwichSiderealTime(referenceDay + 1.75 + 0.464799 / 86400);
    // The equation of the equinoxes, 0.0023 degrees that day, is all that is between them.
    expect(Math.abs(later - mean) / DEGREE).toBeLessThan(0.0024);
  });

  it("takes the IAU 1982 time at UT1 where the tables have none", () => {
    const array = tableOf({ siderealTimeAtReference: null, referenceDay: 57848, ut1MinusUtc: 0.464799 });
    const { expected } = sheetEntry("gmst82-2017apr05");
    expect(siderealTimeOf(array, 57848) / DEGREE).toBeCloseTo(expected as number, 6);
  });
});

function mjdUt1Of(inputs: Entry["inputs"]): number {
  if (typeof inputs.jd_ut1 === "number") return inputs.jd_ut1 - MJD_EPOCH_JD;
  if (typeof inputs.jd_ut1_day === "number") {
    return inputs.jd_ut1_day - MJD_EPOCH_JD + (inputs.ut1_seconds as number) / 86400;
  }
  const seconds = (inputs.utc_seconds as number) + (inputs.ut1_minus_utc_s as number);
  return mjdFromDate(inputs.utc as string) + seconds / 86400;
}

function tableOf(values: Partial<ArrayInfo>): ArrayInfo {
  return {
    name: "",
    frame: "geocentric",
    antennas: [],
    fromTable: true,
    siderealTimeAtReference: null,
    degreesPerDay: SIDEREAL_DEGREES_PER_DAY,
    referenceDay: null,
    ut1MinusUtc: 0,
    timeSystem: "UTC",
    ...values,
  };
}

describe("Earth frames", () => {
  it("agree with Astropy on the ellipsoid, there and back", () => {
    for (const { latitude_deg, longitude_deg, height_m, geocentric_m } of reference.geodetic) {
      const place = { latitude: latitude_deg * DEGREE, longitude: longitude_deg * DEGREE, height: height_m };
      expectVector(geodeticToGeocentric(place), geocentric_m, 1e-8);
      const back = geocentricToGeodetic(geocentric_m);
      expect(back.latitude).toBeCloseTo(place.latitude, 12);
      expect(back.height).toBeCloseTo(place.height, 6);
    }
  });

  it("take east, north, up to the equatorial frames", () => {
    const { inputs, expected } = sheetEntry("enu-to-xyz");
    const values = expected as Record<"local_xyz_m" | "geocentric_difference_m", Record<string, Vector3>>;
    const latitude = (inputs.lat_deg as number) * DEGREE;
    const longitude = (inputs.lon_deg as number) * DEGREE;
    for (const [antenna, enu] of Object.entries(inputs.enu_m as Record<string, Vector3>)) {
      const local = enuToLocal(enu, latitude);
      expectVector(local, values.local_xyz_m[antenna]!, 1e-6);
      expectVector(localToGeocentric(local, longitude), values.geocentric_difference_m[antenna]!, 1e-6);
    }
  });
});

describe("u, v, w", () => {
  it("agree with ERFA's axes of date", () => {
    for (const { sidereal_rad, right_ascension_rad, declination_rad, baseline_m, uvw_m } of reference.uvw) {
      const angle = hourAngle(sidereal_rad, right_ascension_rad);
      expectVector(uvwOf(baseline_m, angle, declination_rad), uvw_m, 1e-9);
    }
  });

  it("agree with the check values in the local and the geocentric frame", () => {
    const enu = sheetEntry("enu-to-xyz").inputs.enu_m as Record<string, Vector3>;
    const local = sheetEntry("uvw-hadec");
    for (const [pair, uvw] of Object.entries(local.expected as Record<string, Vector3>)) {
      const latitude = (local.inputs.lat_deg as number) * DEGREE;
      const baseline = enuToLocal(difference(enu, pair), latitude);
      const found = uvwOf(baseline, (local.inputs.hour_angle_deg as number) * DEGREE, 22 * DEGREE);
      expectVector(found, uvw, local.tolerance.abs!);
    }
    for (const id of ["uvw-axes-of-date", "uvw-j2000-with-gmst"]) {
      const { inputs, expected, tolerance } = sheetEntry(id);
      const longitude = (inputs.lon_deg as number) * DEGREE;
      const latitude = (inputs.lat_deg as number) * DEGREE;
      const declination = (inputs.dec_of_date_deg ?? inputs.dec_icrs_deg) as number;
      for (const [pair, uvw] of Object.entries(expected as Record<string, Vector3>)) {
        const baseline = localToGeocentric(enuToLocal(difference(enu, pair), latitude), longitude);
        const greenwich = (inputs.hour_angle_deg as number) * DEGREE - longitude;
        expectVector(uvwOf(baseline, greenwich, declination * DEGREE), uvw, tolerance.abs!);
      }
    }
  });

  it("are east, north and up for a source at the zenith", () => {
    const latitude = 34 * DEGREE;
    for (const enu of [[100, 0, 0] as const, [0, 100, 0] as const, [0, 0, 100] as const]) {
      expectVector(uvwOf(enuToLocal(enu, latitude), 0, latitude), enu, 1e-9);
    }
  });

  it("change with hour angle as the check value says", () => {
    const uvw = (sheetEntry("uvw-hadec").expected as Record<string, Vector3>)["A5-A6"]!;
    const { expected } = sheetEntry("uvw-hour-angle-derivative");
    expectVector(uvwPerHourAngle(uvw, 22 * DEGREE), expected as Vector3, 1e-5);
  });
});

function difference(enu: Record<string, Vector3>, pair: string): Vector3 {
  const [p, q] = pair.split("-").map((name) => enu[name]!) as [Vector3, Vector3];
  return [q[0] - p[0], q[1] - p[1], q[2] - p[2]];
}

describe("horizontal angles", () => {
  it("agree with ERFA's hd2ae and hd2pa", () => {
    for (const case_ of reference.horizontal) {
      const found = horizontalOf(
        case_.latitude_deg * DEGREE,
        case_.hour_angle_deg * DEGREE,
        case_.declination_deg * DEGREE,
      );
      expect(found.elevation).toBeCloseTo(case_.elevation_rad, 12);
      expect(found.azimuth).toBeCloseTo(case_.azimuth_rad, 12);
      expect(found.parallacticAngle).toBeCloseTo(case_.parallactic_rad, 12);
    }
  });
});
