import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { InputError } from "../../src/util/errors.ts";
import {
  formatAngle,
  formatBytes,
  formatCount,
  formatDeclination,
  formatDuration,
  formatFlux,
  formatFrequency,
  formatLength,
  formatNumber,
  formatPercent,
  formatRightAscension,
  parseAngle,
  parseDuration,
  parseFlux,
  parseFrequency,
  parseLength,
  parseSize,
} from "../../src/util/units.ts";

const DEGREE = Math.PI / 180;

describe("parsing", () => {
  it("reads angles in every unit of the sky", () => {
    expect(parseAngle("30arcmin")).toBeCloseTo(0.5 * DEGREE, 15);
    expect(parseAngle("30'")).toBeCloseTo(0.5 * DEGREE, 15);
    expect(parseAngle(" 1.5 deg ")).toBeCloseTo(1.5 * DEGREE, 15);
    expect(parseAngle("3600 arcsec")).toBeCloseTo(DEGREE, 15);
    expect(parseAngle("250uas") / parseAngle("0.25mas")).toBeCloseTo(1, 12);
    expect(parseAngle("250μas")).toBe(parseAngle("250µas"));
    expect(parseAngle("-2e-3rad")).toBe(-0.002);
  });

  it("reads sizes, decimal and binary, in any case", () => {
    expect(parseSize("2GB")).toBe(2e9);
    expect(parseSize("2gb")).toBe(2e9);
    expect(parseSize("1.5 KiB")).toBe(1536);
    expect(() => parseSize("-1GB")).toThrow('"-1GB" is not a possible size');
  });

  it("reads durations, frequencies, flux densities and lengths", () => {
    expect(parseDuration("1.5h")).toBe(5400);
    expect(parseDuration("250 ms")).toBe(0.25);
    expect(parseFrequency("1.4GHz")).toBe(1.4e9);
    expect(parseFrequency("1400mhz")).toBe(1.4e9);
    expect(parseFlux("0.1mJy")).toBeCloseTo(1e-4, 18);
    expect(parseLength("25m")).toBe(25);
    expect(parseLength("1.2km")).toBe(1200);
  });

  it("does not guess between mJy and MJy", () => {
    expect(() => parseFlux("1MJy")).toThrow(InputError);
  });

  it("asks for the unit, and offers the one that was meant", () => {
    expect(() => parseAngle("30")).toThrow('"30" has no unit');
    expect(() => parseAngle("30arcmn")).toThrow('did you mean "arcmin"?');
    expect(() => parseAngle("wide")).toThrow('"wide" is not an angle');
    expect(() => parseDuration("1e999s")).toThrow("too large");
  });

  it("says where the text stands", () => {
    try {
      parseLength("4 furlongs", { file: "plan.yaml", line: 3 });
      expect.unreachable();
    } catch (error) {
      expect((error as InputError).line).toBe(
        'plan.yaml, line 3: unknown unit "furlongs" in "4 furlongs". Units of a length: mm, cm, m, km',
      );
    }
  });
});

describe("printing", () => {
  it("chooses the unit that reads best", () => {
    expect(formatAngle(0.5 * DEGREE)).toBe("30 arcmin");
    expect(formatAngle(2.5 * DEGREE)).toBe("2.5 deg");
    expect(formatAngle(DEGREE / 3600 / 1000)).toBe("1 mas");
    expect(formatFrequency(1.420014e9, 7)).toBe("1.420014 GHz");
    expect(formatFrequency(79e3)).toBe("79 kHz");
    expect(formatBytes(587520)).toBe("588 kB");
    expect(formatFlux(3.2e-5)).toBe("32 uJy");
    expect(formatLength(11114)).toBe("11.1 km");
    expect(formatLength(0.0123)).toBe("1.23 cm");
  });

  it("does not print 1000 of a unit where 1 of the next is meant", () => {
    expect(formatBytes(999_900)).toBe("1 MB");
    expect(formatLength(999.9)).toBe("1 km");
  });

  it("prints durations as people say them", () => {
    expect(formatDuration(0.45)).toBe("450 ms");
    expect(formatDuration(12.5)).toBe("12.5 s");
    expect(formatDuration(200)).toBe("3 min 20 s");
    expect(formatDuration(12930)).toBe("3 h 36 min");
    expect(formatDuration(7199.9)).toBe("2 h");
    expect(formatDuration(183600)).toBe("2 d 3 h");
    expect(formatDuration(-200)).toBe("-3 min 20 s");
  });

  it("never rounds a little to nothing or nearly all to all", () => {
    expect(formatPercent(0)).toBe("0 %");
    expect(formatPercent(1e-9)).toBe("< 0.001 %");
    expect(formatPercent(0.99999999)).toBe("> 99.99 %");
    expect(formatPercent(1)).toBe("100 %");
    expect(formatPercent(0.1234)).toBe("12.3 %");
  });

  it("keeps thousands apart", () => {
    expect(formatCount(1234567)).toBe("1,234,567");
    expect(formatCount(-1000)).toBe("-1,000");
    expect(formatCount(999)).toBe("999");
  });

  it("prints the coordinates of a place on the sky", () => {
    expect(formatRightAscension(96.1799034476 * DEGREE)).toBe("06h24m43.18s");
    expect(formatDeclination(-5.85322212428 * DEGREE)).toBe("-05d51m11.6s");
    expect(formatRightAscension(-DEGREE)).toBe("23h56m00.00s");
    expect(formatRightAscension(2 * Math.PI - 1e-12)).toBe("00h00m00.00s");
    expect(formatDeclination(-1e-12)).toBe("+00d00m00.0s");
  });

  it("says unknown where there is no number", () => {
    const nothing = [formatAngle, formatBytes, formatCount, formatDeclination, formatDuration, formatFlux];
    const more = [formatFrequency, formatLength, formatNumber, formatPercent, formatRightAscension];
    for (const format of [...nothing, ...more]) expect(format(Number.NaN)).toBe("unknown");
  });

  it("gives back what it printed to three digits", () => {
    fc.assert(
      fc.property(fc.double({ min: 1e-11, max: 6, noNaN: true }), (radians) => {
        const printed = formatAngle(radians);
        fc.pre(!printed.includes("e"));
        expect(Math.abs(parseAngle(printed) / radians - 1)).toBeLessThan(0.0051);
      }),
    );
  });
});
