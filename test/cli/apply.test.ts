/** `visvet apply` as a user runs it: text, exit status, signals, a disk that is full. */
import { spawn, spawnSync } from "node:child_process";
import { createHash } from "node:crypto";
import { closeSync, existsSync, openSync, readdirSync, readFileSync, writeSync } from "node:fs";
import { mkdir, mkdtemp, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { groupsHeader } from "../../src/dataset/fits/write.ts";
import { antennaTable, frequencyTable, groupFile, plainSpec } from "../dataset/group-file.ts";
import { SMALL_NIGHT, SMALL_PLAN } from "../support/small-night.ts";

/** The program as a user has it: built by `npm test` before the tests. */
const MAIN = fileURLToPath(new URL("../../dist/cli/main.js", import.meta.url));
const SAMPLE = "night.uvfits";
const PLAN = "plan.yaml";

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-apply-"));
  await writeFile(join(folder, "night.scenario.yaml"), SMALL_NIGHT);
  await writeFile(join(folder, PLAN), SMALL_PLAN);
  visvet("simulate", "night.scenario.yaml", "--out", SAMPLE);
  const run = visvet(
    "check",
    SAMPLE,
    "--plan",
    PLAN,
    "--out",
    "r",
    "--flags-as",
    "csv,idi",
    "parquet",
    "--quiet",
  );
  expect(run.err).toBe("");
});
afterAll(() => rm(folder, { recursive: true, force: true }));

function visvet(...words: readonly string[]) {
  const run = spawnSync(process.execPath, [MAIN, ...words], { cwd: folder, encoding: "utf8" });
  return { status: run.status, out: run.stdout, err: run.stderr };
}

const reportOf = async (name: string) =>
  JSON.parse(await readFile(join(folder, name, "report.json"), "utf8")) as {
    score: number;
    scoreAfterFlags: number;
    flags: { entries: { rule: string }[] };
  };

describe("visvet apply", () => {
  it("makes a copy that check has nothing to add to, with the score promised", async () => {
    const { status, out, err } = visvet("apply", SAMPLE, "r/flags.json", "--out", "all.uvfits");
    expect([status, err]).toEqual([0, ""]);
    expect(out).toMatch(/^2 flags applied to night\n/);
    // Antenna 3 has 7 of 28 baselines, the line one of 8 channels: 1 - 3/4 x 7/8 of 13440 samples.
    expect(out).toMatch(/4,620 samples are newly flagged, 34\.4 % of the 13,440 that were not/);
    visvet("check", "all.uvfits", "--plan", PLAN, "--out", "r-all", "--quiet");
    const [first, second] = [await reportOf("r"), await reportOf("r-all")];
    expect(second.flags.entries).toEqual([]);
    expect(second.score).toBe(first.scoreAfterFlags);
  });

  it("takes the same flags from every format to the same bytes", async () => {
    for (const format of ["csv", "parquet", "fits"]) {
      const { status } = visvet("apply", SAMPLE, `r/flags.${format}`, "--out", `${format}.uvfits`);
      expect(status).toBe(0);
      expect(
        (await readFile(join(folder, `${format}.uvfits`))).equals(await readFile(join(folder, "all.uvfits"))),
      ).toBe(true);
    }
  });

  it("shows examples before its options", () => {
    const { status, out } = visvet("apply", "--help");
    expect(status).toBe(0);
    expect(out.indexOf("Examples:")).toBeGreaterThanOrEqual(0);
    expect(out.indexOf("Examples:")).toBeLessThan(out.indexOf("Options:"));
  });

  it("applies some of them, and suggests none of those again", async () => {
    const { out } = visvet("apply", SAMPLE, "r/flags.json", "--out", "some.uvfits", "--only", "F1");
    expect(out).toMatch(/Skipped: F2\./);
    const except = visvet("apply", SAMPLE, "r/flags.json", "--out", "but.uvfits", "--except", "F2");
    expect(except.out).toMatch(/Skipped: F2\./);
    expect(
      (await readFile(join(folder, "but.uvfits"))).equals(await readFile(join(folder, "some.uvfits"))),
    ).toBe(true);
    visvet("check", "some.uvfits", "--plan", PLAN, "--out", "r-some", "--quiet");
    const rules = (await reportOf("r-some")).flags.entries.map(({ rule }) => rule);
    expect(rules).not.toContain("silent-antenna");
    expect(rules).toContain("persistent-line");
  });

  it("says in a dry run what would change, and writes nothing", async () => {
    const before = await readdir(folder);
    const { status, out } = visvet("apply", SAMPLE, "r/flags.json", "--dry-run", "--out", "not.uvfits");
    expect(status).toBe(0);
    expect(out).toMatch(/F2 +1,680 +0 +1,260 +persistent-line/);
    expect(out).toMatch(/4,620 samples would be newly flagged/);
    expect(out).toMatch(/Nothing was written: this was a dry run\.\n$/);
    const again = visvet("apply", "all.uvfits", "r/flags.json", "--dry-run");
    expect(again.out).toMatch(/F2 +1,680 +1,680 +0 +persistent-line/);
    expect(again.out).toMatch(/suggested for "night", and this dataset is called "all"/);
    expect(await readdir(folder)).toEqual(before);
  });

  it.each([
    ["no output", ["apply", SAMPLE, "r/flags.json"], /no --out\. Name the copy to write with --out/],
    [
      "an output that is there",
      ["apply", SAMPLE, "r/flags.json", "--out", "r"],
      /^r: there is something of that name/,
    ],
    [
      "an unknown flag",
      ["apply", SAMPLE, "r/flags.json", "--dry-run", "--only", "F11"],
      /no flag F11: it has F1, F2\. Did you mean F1\?/,
    ],
    [
      "a place that the format lacks",
      ["apply", SAMPLE, "r/flags.json", "--out", "x", "--into", "flag-column"],
      /cannot go into a flag column\. Its places are weights and flag-table/,
    ],
    [
      "flags that are not there",
      ["apply", SAMPLE, "none.json", "--dry-run"],
      /none\.json: no such file of flags/,
    ],
    [
      "flags that are none",
      ["apply", SAMPLE, PLAN, "--dry-run"],
      /plan\.yaml.*: (not a table of flags|the table of flags has no column)/,
    ],
    ["a FITS file without flags", ["apply", SAMPLE, SAMPLE, "--dry-run"], /this FITS file has no FLAG table/],
    [
      "a format of flags that there is not",
      ["check", SAMPLE, "--flags-as", "cvs"],
      /--flags-as cvs: unknown format\. Did you mean csv\?/,
    ],
  ])("exits with 2 and one line for %s", (_, words, said) => {
    const { status, out, err } = visvet(...words);
    expect([status, out]).toEqual([2, ""]);
    expect(err.trimEnd().split("\n")).toHaveLength(1);
    expect(err).toMatch(said);
  });
});

/** Some 50 MB, so that there is time to stop the copying: the four groups of the plain file over and over. */
function writeLarge(path: string): void {
  const copies = 60_000;
  const groups = groupFile({ tables: [] });
  const groupBytes = 4 * 4 * (6 + 36);
  const header = groupsHeader({ ...plainSpec, groups: 4 * copies });
  const data = groups.subarray(header.length, header.length + groupBytes);
  const file = openSync(path, "w");
  try {
    writeSync(file, header);
    const many = Buffer.concat(Array(1000).fill(data));
    for (let i = 0; i < copies / 1000; i++) writeSync(file, many);
    writeSync(file, Buffer.alloc((2880 - ((copies * groupBytes) % 2880)) % 2880));
    for (const table of [antennaTable(), frequencyTable()]) writeSync(file, table);
  } finally {
    closeSync(file);
  }
}

describe("a run that is stopped", () => {
  const FLAGS = {
    format: "visvet-flags",
    version: 1,
    dataset: "large",
    entries: [
      {
        id: "F1",
        rule: "burst",
        reason: "for a test",
        antennas: [2],
        baselines: null,
        time: null,
        subbands: null,
        channels: null,
        polarizations: null,
        fields: null,
        samples: 1,
        fraction: null,
        confidence: null,
        cost: {
          sensitivityLossFraction: null,
          beamMajorChangeFraction: null,
          beamMinorChangeFraction: null,
          peakSidelobeChangeFraction: null,
          largestGapChangeFraction: null,
        },
      },
    ],
  };
  const at = () => join(folder, "stopped");
  let digest: string;
  beforeAll(async () => {
    await mkdir(at());
    writeLarge(join(at(), "large.uvfits"));
    await writeFile(join(at(), "flags.json"), JSON.stringify(FLAGS));
    digest = digestOf(join(at(), "large.uvfits"));
  });
  const digestOf = (path: string) => createHash("sha256").update(readFileSync(path)).digest("hex");

  /** Start a run and stop it when its output has begun to grow. */
  function stopped(signal: NodeJS.Signals): Promise<NodeJS.Signals | number | null> {
    const run = spawn(
      process.execPath,
      [MAIN, "apply", "large.uvfits", "flags.json", "--out", "copy.uvfits"],
      {
        cwd: at(),
        stdio: "ignore",
      },
    );
    const watch = setInterval(() => {
      const begun = readdirSync(at()).find((name) => name.endsWith(".partial"));
      if (begun !== undefined && existsSync(join(at(), begun, "copy.uvfits"))) run.kill(signal);
    }, 1);
    return new Promise((resolve) => {
      run.on("exit", (code, by) => {
        clearInterval(watch);
        resolve(by ?? code);
      });
    });
  }

  it.each(["SIGINT", "SIGTERM"] as const)("by %s leaves nothing", async (signal) => {
    expect(await stopped(signal)).toBe(signal);
    expect(readdirSync(at()).sort()).toEqual(["flags.json", "large.uvfits"]);
  });

  it("by SIGKILL leaves nothing under the final name; the next run names what it left, and works", async () => {
    expect(await stopped("SIGKILL")).toBe("SIGKILL");
    const left = readdirSync(at()).filter((name) => name.endsWith(".partial"));
    expect(left).toHaveLength(1);
    expect(existsSync(join(at(), "copy.uvfits"))).toBe(false);
    const { status, out } = visvet(
      "apply",
      "stopped/large.uvfits",
      "stopped/flags.json",
      "--out",
      "stopped/copy.uvfits",
    );
    expect(status).toBe(0);
    expect(out.replace(/\s+/g, " ")).toContain(`A run that was cut short left stopped/${left[0]}: delete it`);
    expect(digestOf(join(at(), "large.uvfits"))).toBe(digest);
  });

  it.skipIf(process.platform !== "linux")(
    "by a limit on the size of files leaves nothing, and says so",
    () => {
      // A limit of 1 MB a file (ulimit counts blocks of 1024 bytes) stops the write as a full disk does.
      const line = `ulimit -f 1024; exec "${process.execPath}" "${MAIN}" apply large.uvfits flags.json --out limited.uvfits`;
      const run = spawnSync("bash", ["-c", line], { cwd: at(), encoding: "utf8" });
      expect(run.stderr).toMatch(/^limited\.uvfits: it cannot be written \(EFBIG\)\. /);
      expect(run.status).toBe(2);
      expect(readdirSync(at()).filter((name) => name.includes("limited"))).toEqual([]);
    },
  );
});
