/** Nights of small datasets, through the same calls as the command makes. */
import {
  appendFile,
  copyFile,
  mkdir,
  mkdtemp,
  readdir,
  readFile,
  rename,
  rm,
  utimes,
  writeFile,
} from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from "vitest";
import { type NightlyRequest, type NightlyResult, runNightly } from "../../src/nightly/nightly.ts";
import { readPlanChoices } from "../../src/nightly/plans.ts";
import { parseKeep } from "../../src/nightly/retention.ts";
import { newAlarms, summaryJson, summaryLine, summaryText } from "../../src/nightly/summary.ts";
import { loadRules, type RuleSet } from "../../src/rules/load.ts";
import { simulateFile } from "../../src/simulate/simulate-file.ts";

const SCENARIO = (day: string, faults = "") => `name: night
array:
  name: Larkfield Array
  latitude: -31.2deg
  longitude: 116.4deg
  layout: { kind: spiral, antennas: 7, inner: 60m, radius: 300m }
  diameter: 12m
time: { start: ${day}T12:00:00, duration: 3min, integration: 10s }
frequency: { start: 1.4GHz, channels: 4, width: 500kHz }
fields:
  - { name: Heron, ra: 8h30m, dec: -28d30m00s }
sky:
  - { flux: 1Jy }
${faults}`;
const SILENT = "faults:\n  - { kind: silent-antenna, antenna: 3 }\n";
const PLAN =
  "field_of_view: 10arcmin\nresolution: 1.8arcmin\nlargest_scale: 4arcmin\ndynamic_range: 100\ncorrects_w: yes\n";

let made: string;
let rules: RuleSet;
beforeAll(async () => {
  made = await mkdtemp(join(tmpdir(), "visvet-nights-"));
  rules = await loadRules();
  for (const [name, scenario] of [
    ["first", SCENARIO("2026-03-01")],
    ["second", SCENARIO("2026-03-02")],
    ["silent", SCENARIO("2026-03-02", SILENT)],
  ] as const) {
    await writeFile(join(made, `${name}.yaml`), scenario);
    await simulateFile(join(made, `${name}.yaml`), join(made, `${name}.uvfits`));
  }
});
afterAll(() => rm(made, { recursive: true, force: true }));

let folder: string;
let data: string;
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-nightly-"));
  data = join(folder, "data");
  await mkdir(data);
});
afterEach(() => rm(folder, { recursive: true, force: true }));

const bring = (name: string, as = `${name}.uvfits`) => copyFile(join(made, `${name}.uvfits`), join(data, as));

async function nightly(part: Partial<NightlyRequest> = {}): Promise<NightlyResult> {
  return runNightly({
    folder: data,
    history: join(folder, "nights.sqlite"),
    out: join(folder, "nights"),
    choices: [],
    rules,
    patience: { rest: 0, wait: 0 },
    keep: null,
    prune: false,
    check: {},
    ...part,
  });
}

const names = ({ news }: NightlyResult) => news.map(({ name }) => name);

describe("a nightly run", () => {
  it("judges what is new, and nothing twice: by content, not by name", async () => {
    await bring("first");
    expect(names(await nightly())).toEqual(["first"]);
    // Untouched, touched, renamed, copied: the same dataset.
    expect(names(await nightly())).toEqual([]);
    await utimes(join(data, "first.uvfits"), new Date(0), new Date(0));
    expect(await nightly()).toMatchObject({ news: [], unchanged: 1 });
    await rename(join(data, "first.uvfits"), join(data, "renamed.uvfits"));
    await copyFile(join(data, "renamed.uvfits"), join(data, "copy.uvfits"));
    expect(await nightly()).toMatchObject({ news: [], unchanged: 2 });
    // Other content under a known name is a new one.
    await bring("second", "renamed.uvfits");
    expect(names(await nightly())).toEqual(["renamed"]);
    const { checks } = await nightly();
    expect(checks.map(({ night }) => night)).toEqual(["2026-03-01", "2026-03-02"]);
  });

  it("writes each report, the index page and a summary", async () => {
    await bring("first");
    const { news } = await nightly();
    const [check] = news;
    if (check?.error !== null) throw new Error("not judged");
    const reports = await readdir(join(folder, "nights", check.report));
    expect(reports.sort()).toEqual(["flags.json", "report.html", "report.json", "report.txt"]);
    const page = await readFile(join(folder, "nights", "index.html"), "utf8");
    expect(page).toContain(`href="${check.report}/report.html"`);
    expect(JSON.parse(await readFile(join(folder, "nights", "summary.json"), "utf8"))).toMatchObject({
      format: "visvet-nightly",
      version: 1,
      datasets: [{ name: "first", night: "2026-03-01" }],
    });
  });

  it("reports a bad file and goes on with the others; until it changes it is not tried again", async () => {
    await bring("first");
    const whole = await readFile(join(data, "first.uvfits"));
    await writeFile(join(data, "cut.uvfits"), whole.subarray(0, 40_000));
    await bring("silent");
    await writeFile(join(data, "notes.txt"), "no dataset\n");
    const result = await nightly();
    expect(names(result).sort()).toEqual(["cut.uvfits", "first", "silent"]);
    const cut = result.news.find(({ name }) => name === "cut.uvfits");
    expect(cut!.error).toContain("the file ends at byte 40000");
    expect(summaryLine(result)).toMatch(/^visvet nightly: 3 datasets judged: 1 unreadable, /);
    const silent = result.news.find(({ name }) => name === "silent");
    if (silent?.error !== null) throw new Error("not judged");
    const found = silent.findings.find(({ rule }) => rule === "silent-antenna");
    expect(found).toMatchObject({ antennas: ["A03"], place: "antenna A03" });
    expect(summaryText(result)).toContain(silent.cause);
    expect(await nightly()).toMatchObject({ news: [], unchanged: 3 });
    await appendFile(join(data, "cut.uvfits"), whole.subarray(40_000));
    expect(await nightly()).toMatchObject({ news: [], unchanged: 3 });
  });

  it("leaves files that are still being written, and hidden and half-written names", async () => {
    await bring("first");
    await bring("second", ".second.uvfits");
    await bring("second", "second.uvfits.part");
    const result = await nightly({ patience: { rest: 3600, wait: 0 } });
    expect(result).toMatchObject({ news: [], unsettled: ["first.uvfits"] });
    expect(summaryLine(result)).toBe("visvet nightly: 0 datasets judged; 1 still being written");
    await utimes(join(data, "first.uvfits"), new Date(0), new Date(0));
    expect(names(await nightly({ patience: { rest: 3600, wait: 0 } }))).toEqual(["first"]);
  });

  it("waits for a file to come to rest", async () => {
    await bring("first");
    expect(names(await nightly({ patience: { rest: 0.3, wait: 30 } }))).toEqual(["first"]);
  });

  it("judges each dataset by the plan that is for it, and again when the plan changes", async () => {
    await writeFile(join(data, "deep.yaml"), PLAN);
    await writeFile(
      join(data, "plans.yaml"),
      "plans:\n  - { files: 'f*.uvfits', plan: deep.yaml }\n  - { field: Heron, frequency: 2GHz to 3GHz, plan: deep.yaml }\n",
    );
    const choices = await readPlanChoices(join(data, "plans.yaml"));
    await bring("first");
    await bring("second");
    const { news } = await nightly({ choices });
    expect(news.map(({ name, plan }) => [name, plan?.endsWith("deep.yaml") ?? false])).toEqual([
      ["first", true],
      ["second", false],
    ]);
    await writeFile(join(data, "deep.yaml"), `${PLAN}target_rms: 1mJy\n`);
    expect(names(await nightly({ choices }))).toEqual(["first"]);
  });

  it("takes the files of one folder together where the list of plans says so", async () => {
    await mkdir(join(data, "n1"));
    await bring("first", "n1/part1.uvfits");
    await bring("second", "n1/part2.uvfits");
    await writeFile(join(data, "plans.yaml"), "plans:\n  - { files: '*/part*.uvfits', together: true }\n");
    const { news } = await nightly({ choices: await readPlanChoices(join(data, "plans.yaml")) });
    expect(news.map(({ path }) => path)).toEqual(["n1"]);
  });

  it("says what retention would delete, and deletes it with its reports when pruning", async () => {
    await bring("first");
    await bring("second");
    const keep = parseKeep("1checks");
    const shown = await nightly({ keep });
    expect(shown.beyond.map(({ name }) => name)).toEqual(["first"]);
    expect(shown.checks).toHaveLength(2);
    const pruned = await nightly({ keep, prune: true });
    expect(pruned.checks.map(({ name }) => name)).toEqual(["second"]);
    expect(await readdir(join(folder, "nights", "2026-03-01"))).toEqual([]);
  });

  it("is refused a broken plan before anything is judged, and a folder that is not there", async () => {
    await bring("first");
    await writeFile(join(data, "bad.yaml"), "field_of_view: wide\n");
    const choice = {
      files: null,
      field: null,
      frequency: null,
      plan: join(data, "bad.yaml"),
      together: false,
    };
    await expect(nightly({ choices: [choice] })).rejects.toThrow();
    await expect(nightly({ folder: join(folder, "lost") })).rejects.toThrow("the folder cannot be read");
    expect(await readdir(folder)).toEqual(["data"]);
  });

  it("gives the same JSON keys with alarms and without", async () => {
    await bring("first");
    const result = await nightly();
    expect(newAlarms(result)).toEqual([]);
    expect(Object.keys(JSON.parse(summaryJson(result)))).toEqual([
      "format",
      "version",
      "summary",
      "worst",
      "datasets",
      "unchanged",
      "stillBeingWritten",
      "alarms",
      "recurringInterference",
      "beyondRetention",
    ]);
  });
});
