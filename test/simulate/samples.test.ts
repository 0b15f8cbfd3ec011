/** The sample inputs: made by their scenarios, small, and what their page says. */
import { mkdtemp, readdir, readFile, rm, stat, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openDataset } from "../../src/dataset/open.ts";
import { readPlan } from "../../src/dataset/plan-file.ts";
import { simulateFile, truthPathOf } from "../../src/simulate/simulate-file.ts";
import type { TruthFile } from "../../src/simulate/truth-file.ts";
import { InputError } from "../../src/util/errors.ts";

const SAMPLES = fileURLToPath(new URL("../../sample-inputs/", import.meta.url));
const NAMES = ["clean", "three-faults", "wide-field", "holes"] as const;

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-samples-"));
});
afterAll(() => rm(folder, { recursive: true, force: true }));

async function truthOf(name: string): Promise<TruthFile> {
  return JSON.parse(await readFile(join(SAMPLES, `${name}.truth.json`), "utf8")) as TruthFile;
}

describe("the sample inputs", () => {
  it.each(NAMES)("%s is made again by its scenario, byte for byte, with its truth", async (name) => {
    const path = join(folder, `${name}.uvfits`);
    await simulateFile(join(SAMPLES, `${name}.scenario.yaml`), path);
    for (const file of [`${name}.uvfits`, `${name}.truth.json`]) {
      const [made, kept] = [await readFile(join(folder, file)), await readFile(join(SAMPLES, file))];
      expect(made.equals(kept), file).toBe(true);
    }
  });

  it.each(NAMES)("%s opens without a note, and has a plan and its line on the page", async (name) => {
    const dataset = await openDataset(join(SAMPLES, `${name}.uvfits`));
    expect(dataset.notes).toEqual([]);
    expect(dataset.array.name).toBe("Larkfield Array");
    expect(await readPlan(join(SAMPLES, `${name}.plan.yaml`))).toHaveProperty("fieldOfView");
    expect(await readFile(join(SAMPLES, "README.md"), "utf8")).toContain(`\`${name}.uvfits\``);
  });

  it("take less than 15 MB together", async () => {
    let bytes = 0;
    for (const file of await readdir(SAMPLES)) bytes += (await stat(join(SAMPLES, file))).size;
    expect(bytes).toBeLessThan(15e6);
  });

  it("hold the three faults that the page names", async () => {
    const truth = await truthOf("three-faults");
    expect(truth.faults.map(({ kind }) => kind)).toEqual([
      "silent-antenna",
      "persistent-line",
      "burst",
      "burst",
      "phase-jump",
    ]);
    const [silent, line, , , jump] = truth.faults;
    expect(silent).toMatchObject({ antennas: [4], cause: "antenna" });
    // Antenna 4 has 11 of 66 baselines; one channel of 20.
    expect(silent!.fraction).toBeCloseTo(11 / 66, 12);
    expect(line!.fraction).toBeCloseTo(1 / 20, 12);
    expect(jump).toMatchObject({ antennas: [9], size: 48, unit: "deg" });
    // 2026-03-02 13:44, to the first integration after it.
    expect((jump!.time![0] - 61101) * 24).toBeCloseTo(13 + 44.5 / 60, 5);
    for (const name of ["clean", "wide-field", "holes"]) expect((await truthOf(name)).faults).toEqual([]);
  });
});

describe("simulating to a file", () => {
  it("refuses to overwrite the file or its truth", async () => {
    const scenario = join(SAMPLES, "holes.scenario.yaml");
    const path = join(folder, "again.uvfits");
    await writeFile(truthPathOf(path), "mine");
    await expect(simulateFile(scenario, path)).rejects.toThrow(InputError);
    expect(await readFile(truthPathOf(path), "utf8")).toBe("mine");
    expect(await readdir(folder)).not.toContain("again.uvfits");
    const other = join(folder, "other.uvfits");
    await writeFile(other, "mine");
    await expect(simulateFile(scenario, other)).rejects.toThrow("the file exists already");
    expect(await readFile(other, "utf8")).toBe("mine");
  });

  it("names the truth after the file", () => {
    expect(truthPathOf("a/night.uvfits")).toBe("a/night.truth.json");
    expect(truthPathOf("night.FITS")).toBe("night.truth.json");
    expect(truthPathOf("night")).toBe("night.truth.json");
  });
});
