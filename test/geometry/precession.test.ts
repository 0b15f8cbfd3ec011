import { describe, expect, it } from "vitest";
import { equinoxDay, precess } from "../../src/geometry/precession.ts";

const RAD = Math.PI / 180;

describe("precess", () => {
  // Meeus 1998, Astronomical Algorithms, 2nd ed., example 21.b (recalled): theta Persei, proper motion applied, from
  // J2000.0 to 2028 November 13.19 TD = JD 2462088.69.
  it("brings a star to the equinox of a date as the textbook does", () => {
    const place = precess(41.054063 * RAD, 49.22775 * RAD, 51544.5, 2462088.69 - 2400000.5);
    expect(place.rightAscension / RAD).toBeCloseTo(41.547214, 5);
    expect(place.declination / RAD).toBeCloseTo(49.348483, 5);
  });

  it("comes back when the dates are exchanged", () => {
    const there = precess(5, -0.7, 33281.9235, 60000);
    const back = precess(there.rightAscension, there.declination, 60000, 33281.9235);
    expect(back.rightAscension).toBeCloseTo(5, 7);
    expect(back.declination).toBeCloseTo(-0.7, 7);
  });

  it("moves a place near the equator by 0.64 degrees from B1950 to J2000", () => {
    const place = precess(1, 0, equinoxDay(1950), equinoxDay(2000));
    expect((place.rightAscension - 1) / RAD).toBeCloseTo(0.64, 2);
  });
});

describe("equinoxDay", () => {
  it("is Besselian for old catalogues and Julian for new ones", () => {
    expect(equinoxDay(1950) + 2400000.5).toBeCloseTo(2433282.4235, 4);
    expect(equinoxDay(2000) + 2400000.5).toBe(2451545);
  });
});
