import { describe, expect, it } from "vitest";
import { formatArcsec, formatChange, formatRatio, formatWavelengths } from "../../src/report/quantity.ts";

describe("formatChange", () => {
  it("has a sign and two digits, and says when there is none", () => {
    expect(formatChange(0.01234)).toBe("+1.2 %");
    expect(formatChange(-0.1299)).toBe("-13 %");
    expect(formatChange(0.00001)).toBe("none");
    expect(formatChange(Number.NaN)).toBe("unknown");
  });
});

describe("formatRatio", () => {
  it("keeps three digits and puts the thousands apart", () => {
    expect(formatRatio(36_842)).toBe("36,800");
    expect(formatRatio(999.6)).toBe("1,000");
    expect(formatRatio(3.234)).toBe("3.23");
    expect(formatRatio(2.5e12)).toBe("2.5e12");
    expect(formatRatio(Number.POSITIVE_INFINITY)).toBe("no limit");
    expect(formatRatio(Number.NaN)).toBe("unknown");
  });
});

describe("formatWavelengths", () => {
  it("takes the multiple that reads best", () => {
    expect(formatWavelengths(184)).toBe("184 λ");
    expect(formatWavelengths(19_870)).toBe("19.9 kλ");
    expect(formatWavelengths(2.5e6)).toBe("2.5 Mλ");
    expect(formatWavelengths(Number.NaN)).toBe("unknown");
  });
});

describe("formatArcsec", () => {
  it("takes the angular unit that reads best", () => {
    expect(formatArcsec(1340)).toBe("22.3 arcmin");
    expect(formatArcsec(10.1)).toBe("10.1 arcsec");
  });
});
