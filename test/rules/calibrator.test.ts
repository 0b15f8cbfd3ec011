import { describe, expect, it } from "vitest";
import { checkDataset } from "../../src/report/check.ts";
import { loadRules } from "../../src/rules/load.ts";
import { simulated, withFaults } from "../support/scenarios.ts";

const PLAN = { purpose: "calibrator", dynamicRange: 300, correctsW: true } as const;

/** Antennas that the rule names. */
async function named(dataset: ReturnType<typeof simulated>["dataset"]) {
  const { findings } = await checkDataset(dataset, { plan: PLAN, rules: await loadRules([]) });
  return findings
    .filter(({ rule }) => rule === "calibrator-antenna")
    .flatMap(({ scope }) => scope.antennas ?? []);
}

describe("the rule calibrator-antenna", () => {
  it("says nothing of antennas that agree with the point source", async () => {
    expect(await named(simulated().dataset)).toEqual([]);
  });

  it("names the antenna whose phase is off all the time, which nothing else could tell from sky", async () => {
    expect(await named(withFaults([{ kind: "phase-jump", antenna: 4, degrees: 25 }]).dataset)).toEqual([4]);
  });
});
