import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { fieldView } from "../../src/dataset/field-view.ts";
import { flaggedView } from "../../src/dataset/flagged-view.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { type DatasetRecipe, reopen } from "../../src/dataset/recipe.ts";
import type { OpenedDataset } from "../../src/dataset/row-summary.ts";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import { writeUvfits } from "../../src/simulate/write-uvfits.ts";
import { simulated } from "../support/scenarios.ts";
import { readAll } from "./read-all.ts";

const folder = mkdtempSync(join(tmpdir(), "recipe-"));
const path = join(folder, "two-fields.uvfits");
let dataset: OpenedDataset;

beforeAll(async () => {
  const scenario = simulated({
    time: { start: "2025-03-04T20:00:00Z", duration: "4min", scan: "1min", gap: "10s" },
    fields: [
      { name: "NEAR", ra: "10h00m00s", dec: "20d00m00s" },
      { name: "FAR", ra: "10h04m00s", dec: "21d00m00s" },
    ],
  });
  await writeUvfits(scenario.dataset, path);
  dataset = await openDataset(path);
});
afterAll(() => rmSync(folder, { recursive: true }));

/** What another thread would make of it. */
const elsewhere = (one: Dataset) => reopen(structuredClone(one.recipe!));

describe("reopen", () => {
  it("gives the same rows, after the recipe went through structured cloning", async () => {
    const again = await elsewhere(dataset);
    expect({ ...again, blocks: null }).toEqual({ ...dataset, blocks: null });
    expect(await readAll(again)).toEqual(await readAll(dataset));
  });

  it("believes what the recipe says of the rows and does not look again", async () => {
    const recipe = dataset.recipe as Extract<DatasetRecipe, { kind: "files" }>;
    const told = { ...dataset.summary, times: 12_345 };
    expect(await reopen({ ...recipe, known: [told] })).toMatchObject({ summary: told });
  });

  it("gives the same view of one field with samples flagged", async () => {
    const far = await fieldView(dataset, 2);
    const view = flaggedView(far, [{ ...EVERYTHING, antennas: [3] }]);
    const again = await elsewhere(view);
    expect(again.fields.map(({ name }) => name)).toEqual(["FAR"]);
    const rows = await readAll(again);
    expect(rows).toEqual(await readAll(view));
    expect([rows.weight.some((weight) => weight < 0), rows.weight.some((weight) => weight > 0)]).toEqual([
      true,
      true,
    ]);
  });

  it("is refused where the file has gone", async () => {
    const recipe = { ...dataset.recipe!, paths: [join(folder, "gone.uvfits")] } as DatasetRecipe;
    await expect(reopen(recipe)).rejects.toThrow("there is no such file");
  });

  it("is not offered for a dataset that is in memory alone, nor for a view of it", async () => {
    const { dataset: invented } = simulated();
    expect(flaggedView(invented, [EVERYTHING]).recipe).toBeUndefined();
    expect((await fieldView(invented, 1)).recipe).toBeUndefined();
  });
});
