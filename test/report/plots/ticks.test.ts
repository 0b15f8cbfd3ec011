import { describe, expect, it } from "vitest";
import {
  angleUnit,
  minutesAfter,
  roundBelow,
  timeAxis,
  wavelengthUnit,
} from "../../../src/report/plots/ticks.ts";
import { START } from "../fixture-survey.ts";

describe("timeAxis", () => {
  it("has ticks at round clock times", () => {
    const axis = timeAxis(START, START + 2 / 24);
    expect(axis.ticks.map(axis.format)).toEqual(["21:00", "21:30", "22:00", "22:30", "23:00"]);
    expect(axis.label).toBe("UTC from 2032-03-14");
  });

  it("says the date at midnight where there is more than a day", () => {
    const axis = timeAxis(START, START + 1);
    expect(axis.ticks.map(axis.format)).toContain("03-15");
  });

  it("has an extent for a single integration", () => {
    const axis = timeAxis(START, START);
    expect(axis.domain[1]).toBeGreaterThan(axis.domain[0]);
  });

  it("keeps the milliseconds of an MJD", () => {
    const axis = timeAxis(START, START + 0.1);
    expect(minutesAfter(axis, START + 0.001 / 86400) - minutesAfter(axis, START)).toBeCloseTo(0.001 / 60, 7);
  });
});

describe("units of axes", () => {
  it("keep the numbers short", () => {
    expect(wavelengthUnit(19_870).name).toBe("kλ");
    expect(wavelengthUnit(500).name).toBe("λ");
    expect(angleUnit(0.02).name).toBe("mas");
    expect(angleUnit(400).name).toBe("arcmin");
  });
});

describe("roundBelow", () => {
  it("is 1, 2 or 5 times a power of ten, not above the value", () => {
    expect([0.19, 0.2, 7, 1234, 0.5].map(roundBelow)).toEqual([0.1, 0.2, 5, 1000, 0.5]);
  });
});
