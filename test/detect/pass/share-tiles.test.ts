import { mkdtemp, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { Dataset } from "../../../src/dataset/dataset.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { type Choice, SAMPLED, SEEN } from "../../../src/detect/pass/choice.ts";
import { secondPass } from "../../../src/detect/pass/second-pass.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import { writeUvfits } from "../../../src/simulate/write-uvfits.ts";
import { Workers } from "../../../src/util/workers.ts";
import { withFaults } from "../../support/scenarios.ts";

let folder: string;
let dataset: Dataset;
const workers = new Workers(3);
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-tiles-"));
  const simulated = withFaults(
    [
      { kind: "persistent-line", channels: "5", amplitude: "8 sigma" },
      { kind: "burst", channels: "8-10", amplitude: "8 sigma", time: ["120s", "200s"] },
      { kind: "flags", channels: "0", share: 0.5 },
      { kind: "duplicate-rows", time: ["60s", "80s"] },
      { kind: "swapped-order", antennas: [3] },
    ],
    { name: "tiles", time: { duration: "8min" }, frequency: { channels: 16 } },
  );
  await writeUvfits(simulated.dataset, join(folder, "tiles.uvfits"));
  dataset = await openDataset(join(folder, "tiles.uvfits"));
});
afterAll(async () => {
  await workers.close();
  await rm(folder, { recursive: true, force: true });
});

/** Tiles that are small and do not end where integrations do; what is looked at differs from one to the next. */
function choiceOf(baselines: number, leftOut: Uint8Array | null): Choice {
  const tileRows = 130;
  const tiles = Math.ceil(dataset.rows / tileRows);
  const looks = Array.from({ length: tiles }, (_, tile) => {
    if (tile % 7 === 3) return null;
    const look = new Uint8Array(baselines).fill(tile % 2 === 0 ? SEEN : 0);
    if (tile % 2 === 1) for (let b = tile % 3; b < baselines; b += 3) look[b] = SAMPLED;
    return look;
  });
  return {
    cut: { tileRows, tiles, slotRows: 65, slotsPerTile: 2 },
    looks,
    isWhole: false,
    leftOut,
  };
}

describe("a second pass whose tiles are shared out", () => {
  it.each([
    ["a cell a row", 250e6, false],
    ["time bins, whose cells several tiles fill", 60_000, false],
    ["channels left out everywhere", 250e6, true],
  ])("is the same to the last bit: %s", async (_, memory, leavesOut) => {
    const survey = await surveyDataset(dataset, { memory });
    expect(survey.tracks.binSeconds > 0).toBe(memory < 1e6);
    const leftOut = leavesOut ? Uint8Array.from({ length: 16 }, (_, c) => (c === 5 ? 1 : 0)) : null;
    const choice = choiceOf(survey.baselines.length, leftOut);
    expect(choice.cut.tiles).toBeGreaterThan(12);
    const alone = await secondPass(survey, { choice });
    const shared = await secondPass(survey, { choice, workers });
    expect(shared).toEqual(alone);
    // toEqual takes any NaN for another, and would take two empty passes for equal.
    expect(alone.clean.real.some((value) => value !== 0 && !Number.isNaN(value))).toBe(true);
  });
});
