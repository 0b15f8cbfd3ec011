import { copyFile, mkdtemp, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, afterEach, beforeAll, expect, describe as group, it, vi } from "vitest";
import yargs from "yargs";
import { describe } from "../../src/cli/describe.ts";
import { simulate } from "../../src/cli/simulate.ts";

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-columns-"));
});
afterEach(() => vi.restoreAllMocks());
afterAll(() => rm(folder, { recursive: true, force: true }));

/** What the command prints. */
async function run(...words: readonly string[]): Promise<string> {
  let printed = "";
  vi.spyOn(process.stdout, "write").mockImplementation((text) => {
    printed += String(text);
    return true;
  });
  await yargs([...words])
    .command(describe)
    .command(simulate)
    .strict()
    .exitProcess(false)
    .fail((message, error) => {
      throw error ?? new Error(message);
    })
    .parseAsync();
  return printed;
}

const TABLE = [
  "mjd,ant1,ant2,u_m,v_m,w_m,freq_MHz,pol,re,im,wt",
  "60000,1,2,30,40,5,1400,XX,1,0,4",
  "60000,1,3,60,80,9,1400,XX,1,0,4",
  "60000,2,3,30,40,4,1400,XX,1,0,4",
].join("\n");

group("visvet describe, of a table", () => {
  it("shows what the columns were taken for, and saves it where it is told", async () => {
    const path = join(folder, "night.csv");
    await writeFile(path, `${TABLE}\n`);
    const saved = join(folder, "saved.yaml");
    const printed = await run("describe", path, "--column-map", saved);
    expect(printed).toMatch(/^night\nFormat {9}columnar tables\n/);
    expect(printed.replaceAll(/\s+/g, " ")).toContain('u is "u_m" in m');
    expect(await readFile(saved, "utf8")).toContain("u: { column: u_m, unit: m }");
    await expect(run("describe", path, "--column-map", saved)).rejects.toThrow("the file exists already");
  });

  it("takes the map that it is given", async () => {
    const path = join(folder, "dusk.csv");
    await writeFile(path, `${TABLE}\n`);
    const map = join(folder, "given.yaml");
    await writeFile(
      map,
      (await readFile(join(folder, "saved.yaml"), "utf8")).replace("unit: MHz", "unit: kHz"),
    );
    const printed = await run("describe", path, "--columns", map);
    expect(printed).toContain("1.4 MHz");
    expect(printed).not.toContain("guessed");
  });

  it("takes a folder of parts as one table, and its map from the folder", async () => {
    const parts = await mkdtemp(join(folder, "parts-"));
    const lines = TABLE.split("\n");
    await writeFile(join(parts, "part1.csv"), `${lines.slice(0, 3).join("\n")}\n`);
    await writeFile(join(parts, "part2.csv"), `${[lines[0], lines[3]].join("\n")}\n`);
    await copyFile(join(folder, "saved.yaml"), join(parts, "columns.yaml"));
    const printed = await run("describe", parts);
    expect(printed).toContain("3 baselines");
    expect(printed).toContain("3 rows of 1 sample");
    expect(printed).not.toMatch(/guessed|left out/);
  });

  it("has no map to save of a FITS file", async () => {
    const saved = join(folder, "none.yaml");
    const promise = run("describe", "sample-inputs/formats.uvfits", "--column-map", saved);
    await expect(promise).rejects.toThrow("this dataset has no columns to map: it is a FITS file");
  });
});

group("visvet simulate, into a table", () => {
  it.each(["parquet", "arrow", "csv", "tsv"])(
    "writes .%s by its suffix, and describe reads it",
    async (suffix) => {
      const inside = await mkdtemp(join(folder, "made-"));
      const scenario = (await readFile("sample-inputs/formats.scenario.yaml", "utf8")).replace(
        "30min",
        "2min",
      );
      await writeFile(join(inside, "small.yaml"), scenario);
      const out = join(inside, `night.${suffix}`);
      expect(await run("simulate", join(inside, "small.yaml"), "--out", out)).toContain("72 rows");
      const text = suffix === "csv" || suffix === "tsv" ? ["night.columns.yaml"] : [];
      expect((await readdir(inside)).sort()).toEqual(
        ["night.truth.json", `night.${suffix}`, "small.yaml", ...text].sort(),
      );
      const printed = await run("describe", out);
      expect(printed).toContain("Larkfield Array");
      expect(printed).toContain("36 baselines; geocentric positions");
      expect(printed).toContain("2 sub-bands of 8 channels");
      await expect(run("simulate", join(inside, "small.yaml"), "--out", out)).rejects.toThrow(
        "exists already",
      );
    },
  );
});
