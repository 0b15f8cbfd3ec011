import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { dateFromMjd, isoFromMjd, MJD_EPOCH_JD, mjdFromCalendar, mjdFromDate } from "../../src/util/dates.ts";

describe("mjdFromDate", () => {
  // Julian dates at 0h by ERFA cal2jd.
  it.each([
    ["1984-01-29", 2445728.5],
    ["2007-08-23", 2454335.5],
    ["2017-04-05", 2457848.5],
    ["2000-01-01", 2451544.5],
    ["1858-11-17", 2400000.5],
  ])("reads %s as ERFA does", (text, julian) => {
    expect(mjdFromDate(text)).toBe(julian - MJD_EPOCH_JD);
  });

  // FITS Standard 4.0, section 4.4.2.1: DD/MM/YY stands for a year of 1900 to 1999.
  it("reads the old form with a two-digit year as 19YY", () => {
    expect(mjdFromDate("29/01/84")).toBe(mjdFromDate("1984-01-29"));
    expect(mjdFromDate("01/02/03")).toBe(mjdFromDate("1903-02-01"));
  });

  it("reads times of day, with and without decimals", () => {
    expect(mjdFromDate("2024-06-15T12:00:00")).toBe(60476.5);
    expect(mjdFromDate(" 2012-01-29T06:00:00.0 ")).toBe(55955.25);
  });

  it.each([
    "",
    "32/01/84",
    "2024-02-30",
    "2023-02-29",
    "2024-13-01",
    "2024-06-15T25:00:00",
    "yesterday",
    "15.6.2024",
  ])("says NaN to %j, which is no date", (text) => {
    expect(mjdFromDate(text)).toBeNaN();
  });

  it("knows the leap day of 2024 and not that of 1900", () => {
    expect(mjdFromDate("2024-02-29")).toBe(60369);
    expect(mjdFromDate("29/02/00")).toBeNaN();
  });
});

describe("isoFromMjd", () => {
  it("prints seconds to the decimals asked for", () => {
    expect(isoFromMjd(60476.5)).toBe("2024-06-15T12:00:00");
    expect(isoFromMjd(60476 + 1.25 / 86400, { seconds: 2 })).toBe("2024-06-15T00:00:01.25");
  });

  it("never prints 60 seconds: what rounds up carries", () => {
    expect(isoFromMjd(60476 + 86399.9996 / 86400)).toBe("2024-06-16T00:00:00");
    expect(isoFromMjd(60476 + 59.9996 / 86400, { seconds: 3 })).toBe("2024-06-15T00:01:00.000");
  });

  it("says unknown where there is no date", () => {
    expect(isoFromMjd(Number.NaN)).toBe("unknown");
    expect(isoFromMjd(1e12)).toBe("unknown");
    expect(dateFromMjd(Number.POSITIVE_INFINITY)).toBe("unknown");
  });

  it("goes back to the same microsecond", () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 80_000 }), fc.nat({ max: 86_399_999 }), (day, milliseconds) => {
        const mjd = day + milliseconds / 86_400_000;
        expect(mjdFromDate(isoFromMjd(mjd, { seconds: 6 }))).toBeCloseTo(mjd, 10);
      }),
    );
  });
});

describe("mjdFromCalendar", () => {
  it("takes the years 0 to 99 as they are", () => {
    expect(dateFromMjd(mjdFromCalendar(84, 1, 29))).toBe("0084-01-29");
  });
});
