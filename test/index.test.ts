import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import {
  checkDataset,
  countSelections,
  derivePlan,
  detect,
  eventMeasures,
  flaggedView,
  flagsJson,
  forecast,
  judge,
  loadRules,
  type Measures,
  openDataset,
  parseFlagFile,
  parsePlan,
  reportJson,
  surveyDataset,
  writeText,
} from "../src/index.ts";

const SAMPLE = fileURLToPath(new URL("../sample-inputs/three-faults.uvfits", import.meta.url));
const PLAN = parsePlan("dynamic_range: 1000\ncorrects_w: yes\n", "plan");

describe("the library", () => {
  it("checks a dataset in one call, and says it as text and JSON", async () => {
    const dataset = await openDataset(SAMPLE);
    const check = await checkDataset(dataset, { plan: PLAN, rules: await loadRules() });
    expect(check.verdict).toBe("caution");
    expect(writeText(check, { width: 100, colour: false })).toMatch(/^CAUTION: three-faults\n/);
    expect(JSON.parse(reportJson(check))).toMatchObject({
      format: "visvet-report",
      version: 1,
      verdict: "caution",
    });
    const flags = parseFlagFile(flagsJson(check), "flags.json");
    const { union, total } = await countSelections(dataset, flags.entries);
    expect(union.unflagged / total.unflagged).toBeGreaterThan(0.2);
    const flagged = await surveyDataset(flaggedView(dataset, flags.entries));
    expect(flagged.totals.flagged).toBe(union.unflagged);
  });

  it("offers each stage by itself", async () => {
    const survey = await surveyDataset(await openDataset(SAMPLE));
    const plan = derivePlan(PLAN, survey);
    const events = await detect(survey, { purpose: "continuum", lineChannels: [] });
    const { measures: ofImage, image } = await forecast(survey, plan, { events });
    const all = [...survey.measures.values(), ...eventMeasures(survey, events), ...ofImage];
    const measures: Measures = new Map(all.map((measure) => [measure.name, measure]));
    expect(judge(await loadRules(), measures, plan).taken.map(({ rule }) => rule)).toContain(
      "silent-antenna",
    );
    expect(image.limits[0]!.dynamicRangeFraction).toBeLessThan(1000);
  });
});
