import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  enuToLocal,
  geocentricToGeodetic,
  geocentricToLocal,
  geodeticToGeocentric,
  localToEnu,
  localToGeocentric,
  type Vector3,
} from "../../src/geometry/earth.ts";
import { EARTH_ROTATION_RATE, greenwichSiderealTime } from "../../src/geometry/sidereal.ts";
import { baselineOf, horizontalOf, hourAngle, uvwOf, uvwRates } from "../../src/geometry/uvw.ts";

const angle = fc.double({ min: -Math.PI, max: Math.PI, noNaN: true });
const latitude = fc.double({ min: -Math.PI / 2, max: Math.PI / 2, noNaN: true });
const metre = fc.double({ min: -5e4, max: 5e4, noNaN: true });
const vector = fc.tuple(metre, metre, metre);

function expectNear(found: Vector3, expected: Vector3, tolerance: number): void {
  found.forEach((value, i) => {
    expect(Math.abs(value - expected[i]!)).toBeLessThan(tolerance);
  });
}

describe("u, v, w of a baseline", () => {
  it("keep its length and give it back", () => {
    fc.assert(
      fc.property(vector, angle, latitude, (baseline, hours, declination) => {
        const uvw = uvwOf(baseline, hours, declination);
        expect(Math.abs(Math.hypot(...uvw) - Math.hypot(...baseline))).toBeLessThan(1e-9);
        expectNear(baselineOf(uvw, hours, declination), baseline, 1e-9);
      }),
    );
  });

  it("are the same in the local and in the geocentric frame", () => {
    fc.assert(
      fc.property(vector, angle, angle, latitude, (local, longitude, sidereal, declination) => {
        const greenwich = hourAngle(sidereal, 0);
        const here = hourAngle(sidereal + longitude, 0);
        const geocentric = localToGeocentric(local, longitude);
        expectNear(uvwOf(local, here, declination), uvwOf(geocentric, greenwich, declination), 1e-8);
      }),
    );
  });

  it("change at the rates that a small step of time shows", () => {
    fc.assert(
      fc.property(vector, angle, latitude, (baseline, hours, declination) => {
        const step = 0.5;
        const turn = step * EARTH_ROTATION_RATE;
        const before = uvwOf(baseline, hours - turn, declination);
        const after = uvwOf(baseline, hours + turn, declination);
        const found = uvwRates(uvwOf(baseline, hours, declination), declination);
        const measured = after.map((value, i) => (value - before[i]!) / (2 * step));
        expectNear(found, measured as [number, number, number], 1e-8);
      }),
    );
  });
});

describe("frames", () => {
  it("undo one another", () => {
    fc.assert(
      fc.property(vector, latitude, angle, (enu, north, east) => {
        expectNear(localToEnu(enuToLocal(enu, north), north), enu, 1e-9);
        expectNear(geocentricToLocal(localToGeocentric(enu, east), east), enu, 1e-9);
      }),
    );
  });

  it("give a place back to a micrometre", () => {
    const height = fc.double({ min: -1e4, max: 1e5, noNaN: true });
    fc.assert(
      fc.property(latitude, angle, height, (north, east, up) => {
        const place = { latitude: north, longitude: east, height: up };
        const position = geodeticToGeocentric(place);
        expectNear(geodeticToGeocentric(geocentricToGeodetic(position)), position, 1e-6);
      }),
    );
  });

  it("have no latitude for the Earth's centre", () => {
    expect(geocentricToGeodetic([0, 0, 0]).latitude).toBeNaN();
  });
});

describe("hour angle", () => {
  it("lies in (-pi, pi]", () => {
    fc.assert(
      fc.property(fc.double({ min: -100, max: 100, noNaN: true }), angle, (sidereal, rightAscension) => {
        const hours = hourAngle(sidereal, rightAscension);
        expect(hours).toBeGreaterThan(-Math.PI);
        expect(hours).toBeLessThanOrEqual(Math.PI);
        expect(Math.abs(Math.sin(hours - (sidereal - rightAscension)))).toBeLessThan(1e-12);
      }),
    );
    expect(hourAngle(-Math.PI, 0)).toBe(Math.PI);
    expect(hourAngle(Number.NaN, 0)).toBeNaN();
  });
});

describe("sidereal time", () => {
  it("lies in [0, 2 pi) and is NaN for no time", () => {
    fc.assert(
      fc.property(fc.double({ min: -1e5, max: 1e5, noNaN: true }), (mjd) => {
        const turn = greenwichSiderealTime(mjd);
        expect(turn).toBeGreaterThanOrEqual(0);
        expect(turn).toBeLessThan(2 * Math.PI);
      }),
    );
    expect(greenwichSiderealTime(Number.NaN)).toBeNaN();
    expect(greenwichSiderealTime(Number.POSITIVE_INFINITY)).toBeNaN();
  });
});

describe("horizontal angles", () => {
  it("put a source that crosses the meridian due south, due north or overhead", () => {
    expect(horizontalOf(0.6, 0, 0.2).azimuth).toBeCloseTo(Math.PI, 12);
    expect(horizontalOf(0.6, 0, 0.9).azimuth).toBeCloseTo(0, 12);
    expect(horizontalOf(0.6, 0, 0.6).elevation).toBeCloseTo(Math.PI / 2, 12);
  });

  it("put a rising source in the east, with a negative parallactic angle in the north", () => {
    const rising = horizontalOf(0.6, -1.2, 0.2);
    expect(rising.azimuth).toBeGreaterThan(0);
    expect(rising.azimuth).toBeLessThan(Math.PI);
    expect(rising.parallacticAngle).toBeLessThan(0);
  });
});
