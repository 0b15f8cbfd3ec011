import { mkdtemp, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { gatherParts, identityOf, joinPartFiles, makePart } from "../../src/measure/part-files.ts";
import type { SurveyPart } from "../../src/measure/survey-part.ts";
import { checkDataset } from "../../src/report/check.ts";
import { writeHtml } from "../../src/report/html.ts";
import { flagsJson, reportJson } from "../../src/report/json.ts";
import { writeText } from "../../src/report/text.ts";
import { loadRules } from "../../src/rules/load.ts";
import type { RuleSet } from "../../src/rules/rule.ts";
import { writeUvfits } from "../../src/simulate/write-uvfits.ts";
import { Workers } from "../../src/util/workers.ts";
import { simulated, withFaults } from "../support/scenarios.ts";

const SMALL = {
  time: { duration: "4min" },
  array: { layout: { kind: "spiral", antennas: 6, inner: "40m", radius: "500m", relief: "2m" } },
  frequency: { channels: 12 },
} as const;
const DATASETS = {
  "flags and rows out of order": () =>
    withFaults(
      [
        { kind: "persistent-line", channels: "5", amplitude: "8 sigma" },
        { kind: "flags", channels: "0", share: 0.5 },
        { kind: "not-finite", channels: "7", share: 0.3 },
        { kind: "duplicate-rows", time: ["60s", "80s"] },
        { kind: "reversed-rows", time: ["120s", "140s"] },
        { kind: "swapped-order", antennas: [3] },
      ],
      { ...SMALL, name: "odd" },
    ),
  "two fields": () =>
    simulated({
      ...SMALL,
      time: { duration: "6min", scan: "90s", gap: "30s" },
      fields: [
        { name: "Heron", ra: "8h30m", dec: "-28d" },
        { name: "Swift", ra: "8h40m", dec: "-29d" },
      ],
    }),
  "a baseline after the other": () => simulated({ ...SMALL, order: "baseline-time" }),
};

let folder: string;
let rules: RuleSet;
const workers = new Workers(3);
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-shared-"));
  rules = await loadRules();
});
afterAll(async () => {
  await workers.close();
  await rm(folder, { recursive: true, force: true });
});

/** What a user gets, in four files. */
async function reportsOf(dataset: Dataset, using?: Workers, surveyed?: SurveyPart): Promise<string[]> {
  const check = await checkDataset(dataset, { plan: {}, rules, workers: using }, surveyed);
  return [
    writeHtml(check),
    writeText(check, { width: 80, colour: false }),
    reportJson(check),
    flagsJson(check),
  ];
}

async function fromParts(dataset: Dataset, of: number, using?: Workers): Promise<SurveyPart> {
  const paths: string[] = [];
  for (let index = 0; index < of; index++) {
    const path = join(folder, `${dataset.name}-${index}-of-${of}.part`);
    const identity = await identityOf(dataset, {
      index,
      of,
      named: dataset.files,
      columnMap: null,
      field: null,
      memory: 1e9,
      tool: "visvet test",
    });
    await makePart(dataset, identity, path, { workers: using });
    paths.push(path);
  }
  return joinPartFiles(await gatherParts(paths.reverse()), dataset);
}

describe("reports", () => {
  it.each([
    ["flags and rows out of order", [3]],
    ["two fields", [2]],
    ["a baseline after the other", [7]],
  ] as const)(
    "are the same bytes from threads and from parts as from one thread: %s",
    async (kind, numbers) => {
      const path = join(folder, `${kind.replaceAll(" ", "-")}.uvfits`);
      await writeUvfits(DATASETS[kind]().dataset, path);
      const dataset = await openDataset(path);
      const once = await reportsOf(dataset);
      expect(once[2]).toContain('"format": "visvet-report"');
      expect(await reportsOf(dataset, workers)).toEqual(once);
      for (const of of numbers) {
        const joined = await fromParts(dataset, of, of === 3 ? workers : undefined);
        expect(await reportsOf(dataset, of === 7 ? workers : undefined, joined)).toEqual(once);
      }
    },
    // Three checks and more, each in several passes.
    240_000,
  );
});
