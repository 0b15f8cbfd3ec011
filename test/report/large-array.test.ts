import { describe, expect, it } from "vitest";
import { checkDataset } from "../../src/report/check.ts";
import { writeHtml } from "../../src/report/html.ts";
import { reportJson } from "../../src/report/json.ts";
import { loadRules } from "../../src/rules/load.ts";
import { largeArray } from "../support/large-array.ts";

const MOST_ROWS = 20_000;

describe("the check of a large array", () => {
  it("of 365 antennas is of all samples, says what it chose, and stays small on disk", async () => {
    const antennas = 365;
    const dataset = largeArray({ antennas, integrations: 1, channels: 3 });
    const check = await checkDataset(dataset, { plan: {}, rules: await loadRules() });
    const { dataset: facts, measures } = JSON.parse(reportJson(check)) as {
      dataset: { baselines: number; samples: number; antennas: number };
      measures: Record<string, { rows?: readonly unknown[] }>;
    };
    const all = (antennas * (antennas - 1)) / 2;
    expect(facts).toMatchObject({ baselines: all, samples: 3 * all, antennas });
    expect(check.blindSpots.join(" ")).toContain("an even choice");
    for (const { rows } of Object.values(measures)) expect(rows?.length ?? 0).toBeLessThanOrEqual(MOST_ROWS);
    expect(writeHtml(check).length).toBeLessThan(2e6);
    // Every row is in the image: its noise is that of a sample over the root of how many there are.
    const natural = check.image.weightings.find(({ weighting }) => weighting === "natural")!;
    const sigma = Number(check.measures.get("dataset")!.table.get("noise_sigma", 0));
    expect((natural.before.noiseJy * Math.sqrt(3 * all)) / sigma).toBeCloseTo(1, 1);
  });
});
