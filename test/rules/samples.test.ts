/** The rules on the sample inputs, without what detection finds: what the files and plans themselves are judged to be. */
import { fileURLToPath } from "node:url";
import { beforeAll, describe, expect, it } from "vitest";
import { openDataset } from "../../src/dataset/open.ts";
import { readPlan } from "../../src/dataset/plan-file.ts";
import { eventMeasures } from "../../src/detect/event-table.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { type Judged, judge } from "../../src/rules/judge.ts";
import { loadRules } from "../../src/rules/load.ts";

const OURS = await loadRules();

async function judged(sample: string): Promise<Judged> {
  const path = (ending: string) =>
    fileURLToPath(new URL(`../../sample-inputs/${sample}${ending}`, import.meta.url));
  const survey = await surveyDataset(await openDataset(path(".uvfits")));
  const plan = derivePlan(await readPlan(path(".plan.yaml")), survey);
  const { measures } = await forecast(survey, plan);
  const all = [...survey.measures.values(), ...eventMeasures(survey, []), ...measures];
  return judge(OURS, new Map(all.map((measure) => [measure.name, measure])), plan);
}

describe("the rules on the sample inputs", () => {
  it("find clean data ready, and could judge them by every rule", async () => {
    const { score, verdict, findings, notJudged } = await judged("clean");
    expect({ verdict, findings, notJudged }).toEqual({ verdict: "ready", findings: [], notJudged: [] });
    expect(score).toBeGreaterThanOrEqual(90);
  });

  describe("of a wide field without a w correction", () => {
    let wide: Judged;
    beforeAll(async () => {
      wide = await judged("wide-field");
    });

    it("hold for the w term, by name, and for nothing else", () => {
      expect(wide.score).toBeLessThan(50);
      const holds = wide.findings.filter(({ verdict }) => verdict === "hold");
      expect(holds.map(({ rule }) => rule)).toEqual(["w-at-field-edge"]);
      expect(holds[0]).toMatchObject({ suggests: "correct-w", flags: [], consequence: { unit: "fraction" } });
      expect(holds[0]!.limits.from).toContain("the plan's field of view (50 arcmin, given)");
    });

    it("name the baselines that do it", () => {
      const baselines = wide.findings.find(({ rule }) => rule === "w-long-baselines")!;
      expect(baselines.scope.baselines).toContainEqual([11, 12]);
    });
  });

  it("hold for the hole between a close core and a far ring", async () => {
    const { score, findings } = await judged("holes");
    expect(score).toBeLessThan(50);
    expect(findings[0]).toMatchObject({ rule: "radial-gap", verdict: "hold", suggests: "more-data" });
    // The scenario leaves nothing between 150 m and 1 km; at 21.5 cm that is 700 to 4650 wavelengths.
    const [from, to] = /spacings of (\d+) to (\d+) wavelengths/
      .exec(findings[0]!.evidence.join(" "))!
      .slice(1)
      .map(Number);
    expect(from).toBeGreaterThan(600);
    expect(from).toBeLessThan(800);
    expect(to).toBeGreaterThan(4400);
    expect(to).toBeLessThan(5300);
  });
});
