import { describe, expect, it } from "vitest";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { blindSpots } from "../../src/report/blind-spots.ts";
import { simulated, TRAPS } from "../support/scenarios.ts";

async function spotsOf(
  dataset: ReturnType<typeof simulated>["dataset"],
  purpose: "continuum" | "calibrator" = "continuum",
) {
  const survey = await surveyDataset(dataset);
  return blindSpots(survey, derivePlan({ purpose }, survey)).join("\n");
}

describe("blindSpots", () => {
  it("says which jump would have been found", async () => {
    const text = await spotsOf(simulated().dataset);
    const degrees = Number(/jump of a typical antenna below ([\d.]+) deg/.exec(text)?.[1]);
    expect(degrees).toBeGreaterThan(0.5);
    expect(degrees).toBeLessThan(15);
  });

  it("says that noise hides jumps of any size", async () => {
    expect(await spotsOf(TRAPS.noiseAlone().dataset)).toContain(
      "hide a phase jump of an antenna, whatever its size",
    );
  });

  it("says what few integrations and few channels hide", async () => {
    const text = await spotsOf(simulated({ time: { duration: "30s" }, frequency: { channels: 1 } }).dataset);
    expect(text).toContain("With 3 integrations");
    expect(text).toContain("fewer than three channels");
    expect(text).not.toContain("typical antenna below");
  });

  it("knows the sky of a calibrator", async () => {
    expect(await spotsOf(simulated().dataset)).toContain("The sky is not known beforehand");
    expect(await spotsOf(simulated().dataset, "calibrator")).not.toContain("The sky is not known beforehand");
  });
});
