import { describe, expect, it } from "vitest";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { simulated, withFaults } from "../support/scenarios.ts";

type Row = Record<string, number>;

async function judged(
  faults: Parameters<typeof withFaults>[0],
  purpose: "calibrator" | "continuum" = "calibrator",
) {
  const { dataset } = withFaults(faults, { sky: [{ flux: "2Jy" }], time: { duration: "10min" } });
  const survey = await surveyDataset(dataset);
  const { measures, image } = await forecast(survey, derivePlan({ purpose, dynamicRange: 1000 }, survey));
  const rows = (name: string) => measures.find((measure) => measure.name === name)!.table.objects() as Row[];
  return { antennas: rows("calibrator_antenna"), baselines: rows("calibrator_baseline"), image };
}

describe("a calibrator", () => {
  it("without faults has every antenna alike and nothing on baselines", async () => {
    const { antennas, baselines, image } = await judged([]);
    expect(antennas).toHaveLength(9);
    expect(baselines).toHaveLength(36);
    for (const row of antennas) {
      expect(Math.abs(row.amplitude_ratio! - 1)).toBeLessThan(4.5 * row.amplitude_error!);
      expect(Math.abs(row.phase_deg!)).toBeLessThan(4.5 * row.phase_error_deg!);
    }
    for (const row of baselines) expect(row.significance).toBeLessThan(4.5);
    // 60 integrations, 16 channels and 2 products of 0.126 Jy on 8 baselines of 2 Jy.
    const error = 0.1265 / Math.sqrt(60 * 16 * 2) / 2 / Math.sqrt(8);
    for (const row of antennas) expect(Math.abs(row.amplitude_error! / error - 1)).toBeLessThan(0.1);
    // The errors are neither hopeful nor faint-hearted: departures are of their size.
    const chi2 = (of: (row: Row) => number, rows: Row[]) =>
      rows.reduce((sum, row) => sum + of(row) ** 2, 0) / rows.length;
    expect(chi2((row) => row.phase_deg! / row.phase_error_deg!, antennas)).toBeGreaterThan(0.2);
    expect(chi2((row) => row.phase_deg! / row.phase_error_deg!, antennas)).toBeLessThan(2.5);
    expect(chi2((row) => row.phase_deg! / row.phase_error_deg!, baselines)).toBeGreaterThan(0.35);
    expect(chi2((row) => row.phase_deg! / row.phase_error_deg!, baselines)).toBeLessThan(1.6);
    expect(image.limits.filter(({ cause }) => cause === "calibrator-antenna").length).toBeLessThan(2);
  });

  it("shows an antenna's phase and amplitude with their size, and blames no other", async () => {
    const { antennas, image } = await judged([
      { kind: "phase-jump", antenna: 4, degrees: 20, time: ["0s", "10min"] },
      { kind: "gain-step", antenna: 7, factor: 1.3, time: ["0s", "10min"] },
    ]);
    const of = (antenna: number) => antennas.find((row) => row.antenna === antenna)!;
    expect(Math.abs(of(4).phase_deg!)).toBeCloseTo(20, 0);
    expect(of(7).amplitude_ratio).toBeCloseTo(1.3, 1);
    for (const row of antennas) {
      if (row.antenna !== 4) expect(Math.abs(row.phase_deg!)).toBeLessThan(5 * row.phase_error_deg!);
      if (row.antenna !== 7)
        expect(Math.abs(row.amplitude_ratio! - 1)).toBeLessThan(5 * row.amplitude_error!);
    }
    const causes = image.limits.filter(({ cause }) => cause === "calibrator-antenna");
    expect(causes.map(({ text }) => text.slice(0, 9)).sort()).toEqual(["antenna 4", "antenna 7"]);
    expect(of(4).dynamic_range_ratio).toBeGreaterThan(1);
  });

  it("lays at a baseline what its antennas do not explain", async () => {
    const { antennas, baselines } = await judged([{ kind: "baseline-phase", baseline: [2, 6], degrees: 50 }]);
    const worst = [...baselines].sort((a, b) => b.significance! - a.significance!)[0]!;
    expect([worst.antenna1, worst.antenna2]).toEqual([2, 6]);
    // The two antennas take a share of it: 50 (N - 2)/N and a little more, N = 9.
    expect(Math.abs(worst.phase_deg!)).toBeGreaterThan(35);
    for (const row of antennas) expect(Math.abs(row.phase_deg!)).toBeLessThan(10);
  });

  it("is not judged when the plan is for another purpose, or nothing stands above the noise", async () => {
    expect((await judged([], "continuum")).antennas).toEqual([]);
    const { dataset } = simulated({ sky: [] });
    const survey = await surveyDataset(dataset);
    const { measures } = await forecast(survey, derivePlan({ purpose: "calibrator" }, survey));
    const rows = measures.find(({ name }) => name === "calibrator_antenna")!.table;
    expect(rows.numRows()).toBe(0);
  });
});
