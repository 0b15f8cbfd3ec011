import { describe, expect, it } from "vitest";
import { checkDataset } from "../../src/report/check.ts";
import { loadRules } from "../../src/rules/load.ts";
import { simulated, withFaults } from "../support/scenarios.ts";

const PLAN = { purpose: "calibrator", dynamicRange: 300, correctsW: true } as const;

/** What a rule names. */
async function named(rule: string, dataset: ReturnType<typeof simulated>["dataset"]) {
  const { findings } = await checkDataset(dataset, { plan: PLAN, rules: await loadRules([]) });
  return findings
    .filter((finding) => finding.rule === rule)
    .flatMap(({ scope }) => [...(scope.antennas ?? []), ...(scope.baselines ?? [])]);
}

describe("the rule calibrator-antenna", () => {
  it("says nothing of antennas that agree with the point source", async () => {
    expect(await named("calibrator-antenna", simulated().dataset)).toEqual([]);
  });

  it("names the antenna whose phase is off all the time, which nothing else could tell from sky", async () => {
    expect(
      await named(
        "calibrator-antenna",
        withFaults([{ kind: "phase-jump", antenna: 4, degrees: 25 }]).dataset,
      ),
    ).toEqual([4]);
  });
});

describe("the rule calibrator-baseline", () => {
  it("says nothing of baselines that agree with the point source", async () => {
    expect(await named("calibrator-baseline", simulated().dataset)).toEqual([]);
  });

  it("names the baseline that its antennas do not explain", async () => {
    const { dataset } = withFaults([{ kind: "baseline-phase", baseline: [2, 6], degrees: 50 }]);
    expect(await named("calibrator-baseline", dataset)).toEqual([[2, 6]]);
  });
});
