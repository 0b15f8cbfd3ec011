/** Geometry faults of simulated datasets, through the survey: named, sized, and laid at the right antenna. */
import { describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { judgeTracks } from "../../src/imaging/geometry-report.ts";
import { samplingOf } from "../../src/imaging/sampling.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import type { Simulated } from "../../src/simulate/simulate.ts";
import { FAULTY, simulated, withFaults } from "../support/scenarios.ts";

async function reportOf({ dataset }: { readonly dataset: Dataset }) {
  return judgeTracks(samplingOf(await surveyDataset(dataset)));
}

async function resultOf(made: Simulated) {
  const { judged } = await reportOf(made);
  if (!judged.judged) throw new Error(judged.why);
  return judged.result;
}

describe("geometry of simulated data", () => {
  it.each(["geocentric", "local"] as const)("agrees with %s tables that are right", async (frame) => {
    const result = await resultOf(simulated({ array: { frame } }));
    expect(result.fault).toBeNull();
    expect(result.relativeRms).toBeLessThan(1e-5);
  });

  it.each([
    ["flippedAxis", "axis", "flipped-v"],
    ["zeroedW", "axis", "zeroed-w"],
    ["metresForSeconds", "unit", null],
    ["swappedOrder", "antenna-order", null],
  ] as const)("names the fault of %s", async (name, fault, axis) => {
    const result = await resultOf(FAULTY[name]());
    expect(result.fault).toBe(fault);
    expect(result.axisFault).toBe(axis);
  });

  it.each(["wrongTablePosition", "wrongUvwPosition"] as const)(
    "finds the antenna and its offset in metres in %s",
    async (name) => {
      const result = await resultOf(FAULTY[name]());
      expect(result.fault).toBe("antenna-position");
      expect(result.offAntenna).toBe(4);
      // East 5, north -3, up 1 metres.
      expect(result.offsets.get(4)!.distance / Math.sqrt(35)).toBeCloseTo(1, 3);
    },
  );

  it("finds a position that table, u, v, w and delays have wrong alike, by the phases of the source", async () => {
    const made = (faults: Parameters<typeof withFaults>[0]) =>
      withFaults(faults, {
        time: { duration: "6h", integration: "60s" },
        frequency: { channels: 4 },
        sky: [{ flux: "2Jy" }],
      });
    const report = await reportOf(
      made([{ kind: "antenna-position", antenna: 4, offset: ["20cm", "-10cm", "0m"], of: "model" }]),
    );
    if (!report.judged.judged) throw new Error("not judged");
    expect(report.judged.result.fault).toBeNull();
    const found = report.phases.get(4)!;
    // North is x and z: of 10 cm north at latitude -31.2, 5.2 cm lie in the plane of the equator.
    const equatorial = Math.hypot(0.2, 0.1 * Math.sin(31.2 * (Math.PI / 180)));
    expect(Math.abs(found.offset / equatorial - 1)).toBeLessThan(0.02);
    expect(found.offset).toBeGreaterThan(10 * found.error);
    for (const [antenna, { offset, error }] of report.phases) {
      if (antenna !== 4) expect(offset).toBeLessThan(5 * error);
    }
    const clean = await reportOf(made([]));
    expect(clean.phases.size).toBe(9);
    for (const { offset, error } of clean.phases.values()) expect(offset).toBeLessThan(5 * error);
  });

  it("names the antenna on the ridge of the wide-field sample, and its height", async () => {
    const dataset = await openDataset("sample-inputs/wide-field.uvfits");
    const { ridge } = await reportOf({ dataset });
    expect(ridge!.antenna).toBe(11);
    expect(Math.abs(ridge!.height / 60 - 1)).toBeLessThan(0.01);
  });

  it("puts into its measures what it found", async () => {
    const { dataset } = FAULTY.wrongTablePosition();
    const survey = await surveyDataset(dataset);
    const { measures } = await forecast(survey, derivePlan({}, survey));
    const rows = (name: string) =>
      measures.find((measure) => measure.name === name)!.table.objects() as Record<string, number | string>[];
    const [geometry] = rows("geometry");
    expect(geometry).toMatchObject({ judged: 1, fault: "antenna-position", off_antenna: 4 });
    const own = rows("antenna_geometry").find(({ antenna }) => antenna === 4)!;
    expect(Number(own.offset_m)).toBeCloseTo(Math.sqrt(35), 2);
    expect(Number(own.significance)).toBeGreaterThan(100);
    expect(rows("baseline_geometry")).toHaveLength(36);
    // 24 wavelengths or so at 1.4 GHz, seen at half of a field of 1.13 lambda/D of 12 m.
    const wavelengths = Number(own.offset_wavelengths);
    expect(Number(own.offset_phase_edge) / (2 * Math.PI * wavelengths * Math.sin(0.0201 / 2))).toBeCloseTo(
      1,
      2,
    );
  });
});
