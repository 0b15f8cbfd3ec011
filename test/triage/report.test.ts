import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { readFlagFile } from "../../src/flags/flag-file.ts";
import { loadRules } from "../../src/rules/load.ts";
import { readSkyImage } from "../../src/triage/image/sky-image.ts";
import { triagePage } from "../../src/triage/report/page.ts";
import { triageText } from "../../src/triage/report/text.ts";
import { writeTriage } from "../../src/triage/report/write.ts";
import { symptomNamed } from "../../src/triage/symptoms/named.ts";
import { CLEAN_STATEMENT, type Triage, triageImage, triageSymptom } from "../../src/triage/triage.ts";
import { FAULTY } from "../support/scenarios.ts";
import { CASES, imageOf } from "./support/cases.ts";
import { writeImage } from "./support/image-file.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-"));
afterAll(() => rmSync(folder, { recursive: true }));

async function triageOf(name: string): Promise<Triage> {
  const game = CASES.find((one) => one.name === name)!.make(900);
  const path = join(folder, "image.fits");
  writeImage(path, await imageOf(game, "restored"), game.grid, game.simulated.dataset.fields[0]!, game.beam);
  const array = game.simulated.dataset.array;
  const antennas = array.antennas.map((antenna) => ({ ...antenna, name: `<${antenna.name}>\u001b[31m` }));
  const dataset = { ...game.simulated.dataset, name: "<b>night</b>", array: { ...array, antennas } };
  return triageImage(dataset, await readSkyImage(path), { plan: {}, rules: await loadRules() });
}

describe("the reports of a bad baseline", () => {
  let triage: Triage;
  beforeAll(async () => {
    triage = await triageOf("bad baseline for some minutes");
  });

  it("name the baseline, its time, the test and the cure", () => {
    const text = triageText(triage, { width: 80, colour: false });
    const [cause] = triage.causes;
    expect(cause).toMatchObject({ kind: "baseline", flags: ["T1"] });
    expect(text).toContain("One baseline is off");
    for (const heading of [
      "Symptoms",
      "Causes",
      "Suggested flags",
      "The uv plane",
      "What triage could not see",
    ]) {
      expect(text).toContain(`\n${heading}\n`);
    }
    expect(cause!.test).toContain("Make the image again without these samples");
  });

  it.each([80, 140])("keep to %i columns", (width) => {
    const lines = triageText(triage, { width, colour: false }).split("\n");
    expect(Math.max(...lines.map((line) => line.length))).toBeLessThanOrEqual(width);
  });

  it("escape what the dataset is called, and run no script", () => {
    const page = triagePage(triage);
    expect(page).not.toContain("<b>night</b>");
    expect(page).not.toContain("\u001b");
    expect(page).not.toMatch(/<script|https?:\/\/(?!www\.w3\.org)/);
    expect(page).toContain('id="triage-image"');
    expect(page).toContain("out of family");
  });

  it("are written with flags that can be applied, the same bytes every time", async () => {
    const out = join(folder, "out");
    const paths = await writeTriage(triage, out);
    expect(paths.map((path) => path.slice(out.length + 1))).toEqual([
      "triage.html",
      "triage.txt",
      "triage.json",
      "flags.json",
    ]);
    const flags = await readFlagFile(join(out, "flags.json"));
    expect(flags.entries[0]).toMatchObject({ id: "T1", rule: "triage-baseline" });
    const json = readFileSync(join(out, "triage.json"), "utf8");
    await writeTriage(triage, out);
    expect(readFileSync(join(out, "triage.json"), "utf8")).toBe(json);
    const schema = JSON.parse(
      readFileSync(new URL("../../src/triage/schema/triage.schema.json", import.meta.url), "utf8"),
    );
    expect(Object.keys(JSON.parse(json))).toEqual(expect.arrayContaining(schema.required));
    expect(Object.keys(JSON.parse(json).causes[0])).toEqual(
      expect.arrayContaining(schema.$defs.cause.required),
    );
  });
});

describe("a clean image", () => {
  it("is blamed on nothing, and said to be", async () => {
    const triage = await triageOf("clean");
    expect(triage.causes).toEqual([]);
    expect(triage.flags).toEqual([]);
    expect(triage.statement).toBe(CLEAN_STATEMENT);
  });
});

describe("a described symptom", () => {
  it("ranks the findings that make it", async () => {
    const request = { plan: {}, rules: await loadRules() };
    const triage = await triageSymptom(FAULTY.persistentLine().dataset, "noise", request);
    expect(triage.causes[0]).toMatchObject({ kind: "persistent-line" });
    expect(triage.image).toBeNull();
    expect(triageText(triage, { width: 80, colour: false })).toContain(
      "Without an image nothing is measured",
    );
    expect(triagePage(triage)).toContain("visvet triage");
  });

  it("is one of our words", () => {
    expect(symptomNamed("bowl")).toBe("bowl");
    expect(() => symptomNamed("stripe")).toThrow("--symptom stripe: unknown symptom");
    try {
      symptomNamed("stripe");
    } catch (error) {
      expect((error as { advice: string }).advice).toContain(
        "Did you mean stripes? Symptoms: stripes, rings",
      );
    }
  });
});
