import { spawnSync } from "node:child_process";
import { mkdir, mkdtemp, readdir, readFile, rename, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { writeUvfits } from "../../src/simulate/write-uvfits.ts";
import { simulated } from "../support/scenarios.ts";

/** The program as a user has it: built by `npm test` before the tests. */
const MAIN = fileURLToPath(new URL("../../dist/cli/main.js", import.meta.url));
const SMALL = {
  time: { duration: "4min" },
  array: { layout: { kind: "spiral", antennas: 6, inner: "40m", radius: "500m", relief: "2m" } },
  frequency: { channels: 12 },
} as const;

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-join-"));
  for (const name of ["night", "other"]) {
    await writeUvfits(simulated({ ...SMALL, name }).dataset, join(folder, `${name}.uvfits`));
  }
});
afterAll(() => rm(folder, { recursive: true, force: true }));

function visvet(...words: readonly string[]) {
  const run = spawnSync(process.execPath, [MAIN, ...words], { cwd: folder, encoding: "utf8" });
  return { status: run.status, out: run.stdout, err: run.stderr };
}

function makeParts(dataset: string, of: number, ...words: readonly string[]): string[] {
  return Array.from({ length: of }, (_, index) => {
    const path = `${dataset}-${index}-of-${of}.part`;
    const made = visvet(
      "part",
      `${dataset}.uvfits`,
      "--index",
      `${index}`,
      "--of",
      `${of}`,
      "--out",
      path,
      ...words,
    );
    expect([made.status, made.err]).toEqual([0, ""]);
    return path;
  });
}

async function filesOf(out: string): Promise<Map<string, string>> {
  const names = (await readdir(join(folder, out))).sort();
  return new Map(
    await Promise.all(
      names.map(async (name) => [name, await readFile(join(folder, out, name), "latin1")] as const),
    ),
  );
}

describe("visvet join", () => {
  it("writes the files of one check, in threads or not, wherever the dataset is now", async () => {
    await writeFile(join(folder, "plan.yaml"), "dynamic_range: 50\n");
    const words = ["--plan", "plan.yaml", "--quiet"];
    const once = visvet("check", "night.uvfits", "--out", "once", "--jobs", "3", ...words);
    expect(once.err).toBe("");
    const parts = makeParts("night", 2, "--field", "1");
    await rename(join(folder, "night.uvfits"), join(folder, "moved.uvfits"));
    const lost = visvet("join", ...parts, "--out", "joined", ...words);
    expect([lost.status, lost.out]).toEqual([2, ""]);
    expect(lost.err).toMatch(/night\.uvfits.*no such file/);
    await mkdir(join(folder, "elsewhere"));
    await rename(join(folder, "moved.uvfits"), join(folder, "elsewhere/night.uvfits"));
    const moved = ["--dataset", "elsewhere/night.uvfits", "--jobs", "1"];
    expect(visvet("join", ...parts.reverse(), "--out", "joined", ...moved, ...words)).toEqual(once);
    await rename(join(folder, "elsewhere/night.uvfits"), join(folder, "night.uvfits"));
    const files = await filesOf("once");
    expect([...files.keys()]).toEqual(["flags.json", "report.html", "report.json", "report.txt"]);
    expect(await filesOf("joined")).toEqual(files);
  });

  it("says which parts are missing, and which are there twice", () => {
    const parts = makeParts("night", 3, "--quiet");
    const missing = visvet("join", parts[1]!);
    expect(missing).toMatchObject({ status: 2, out: "" });
    expect(missing.err).toMatch(
      /of 3 parts, numbered from 0, these are missing: 0, 2\. Make them: visvet part/,
    );
    expect(visvet("join", ...parts, "elsewhere/../night-2-of-3.part").err).toMatch(
      /this is part 2, and so is/,
    );
    expect(visvet("join", ...parts, "--memory", "2GB").err).toMatch(/the parts were made with --memory/);
  });
});

describe("visvet part", () => {
  it("says what it wrote, and leaves a whole part as it is", async () => {
    const words = ["part", "night.uvfits", "--index", "1", "--of", "2", "--out", "one.part"];
    expect(visvet(...words).out).toBe("Wrote one.part: part 1 of 2, 180 rows from row 180 on\n");
    expect(visvet(...words).out).toBe("one.part: part 1 of 2 is there already\n");
    await writeFile(join(folder, "one.part"), "half a file");
    expect(visvet(...words).out).toMatch(/^Wrote/);
  });

  it.each([
    [
      ["--index", "2", "--of", "2"],
      /--index: there is no part 2 of 2: expected 0 to 1\. Parts are numbered from 0/,
    ],
    [["--index", "0", "--of", "0"], /--of: 0 is no number of parts/],
    [
      ["--index", "0", "--of", "2", "--memory", "10MB"],
      /--memory: 10MB is too little: expected at least 256 MB/,
    ],
    [["--index", "0", "--of", "2", "--jobs", "0"], /--jobs: 0 is no number of threads/],
  ])("refuses what makes no sense: %j", (words, said) => {
    const { status, err } = visvet("part", "night.uvfits", "--out", "never.part", ...words);
    expect(status).toBe(2);
    expect(err.trimEnd().split("\n")).toHaveLength(1);
    expect(err).toMatch(said);
    expect(err).not.toMatch(/should not/);
  });
});

describe("rows that are damaged", () => {
  it("are told in the same words with threads as without", async () => {
    const bytes = await readFile(join(folder, "night.uvfits"));
    await writeFile(join(folder, "cut.uvfits"), bytes.subarray(0, 100_000));
    const [one, three] = ["1", "3"].map((jobs) => visvet("check", "cut.uvfits", "--jobs", jobs));
    expect(one!.status).toBe(2);
    expect(three).toEqual(one);
  });
});
