import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { openDataset } from "../../src/dataset/open.ts";
import { readPlan } from "../../src/dataset/plan-file.ts";
import { checkDataset } from "../../src/report/check.ts";
import { writeText } from "../../src/report/text.ts";
import { loadRules } from "../../src/rules/load.ts";

const sample = (name: string) => fileURLToPath(new URL(`../../sample-inputs/${name}`, import.meta.url));

describe("the report of the wide-field sample", () => {
  // Its scenario puts antenna 11 on a ridge, 60 m above the plane of the others.
  it("names the antenna on the ridge and its height within 1 %", async () => {
    const dataset = await openDataset(sample("wide-field.uvfits"));
    const plan = await readPlan(sample("wide-field.plan.yaml"));
    const check = await checkDataset(dataset, { plan, rules: await loadRules([]) });
    const { ridge_antenna, ridge_height_m } = check.measures.get("geometry")!.table.object() as Record<
      string,
      number
    >;
    expect(ridge_antenna).toBe(11);
    expect(Math.abs(ridge_height_m! / 60 - 1)).toBeLessThan(0.01);
    expect(writeText(check, { width: 80, colour: false })).toMatch(
      /furthest off the plane of the others +A11, 60 m above/,
    );
  });
});
