import { spawnSync } from "node:child_process";
import { mkdtemp, readdir, readFile, rm, truncate, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";

/** The program as a user has it: built by `npm test` before the tests. */
const MAIN = fileURLToPath(new URL("../../dist/cli/main.js", import.meta.url));

/** Small, so that the program can be run many times: eight antennas, five minutes. */
const SCENARIO = `name: small
array:
  name: Larkfield Array
  latitude: -31.2deg
  longitude: 116.4deg
  layout: { kind: spiral, antennas: 8, inner: 60m, radius: 300m }
  diameter: 12m
time: { start: 2026-03-01T12:00:00, duration: 5min, integration: 10s }
frequency: { start: 1.4GHz, channels: 8, width: 500kHz }
fields:
  - { name: Heron, ra: 8h30m, dec: -28d30m00s }
sky:
  - { flux: 1Jy }
`;
const PLAN = `field_of_view: 10arcmin
resolution: 1.8arcmin
largest_scale: 4arcmin
dynamic_range: 100
corrects_w: yes
`;
const SILENT = "faults:\n  - { kind: silent-antenna, antenna: 3 }\n";

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-main-"));
  await writeFile(join(folder, "plan.yaml"), PLAN);
  for (const [name, scenario] of [
    ["good", SCENARIO],
    ["silent", SCENARIO + SILENT],
  ]) {
    await writeFile(join(folder, `${name}.scenario.yaml`), scenario!);
    visvet("simulate", `${name}.scenario.yaml`, "--out", `${name}.uvfits`);
  }
});
afterAll(() => rm(folder, { recursive: true, force: true }));

function visvet(...words: readonly string[]) {
  const run = spawnSync(process.execPath, [MAIN, ...words], { cwd: folder, encoding: "utf8" });
  return { status: run.status, out: run.stdout, err: run.stderr };
}

describe("visvet check", () => {
  it("exits with 0 for a dataset that is ready, and writes the four files", async () => {
    const { status, out, err } = visvet("check", "good.uvfits", "--plan", "plan.yaml");
    expect([status, err]).toEqual([0, ""]);
    expect(out.split("\n")[0]).toBe("READY: good");
    expect((await readdir(join(folder, "visvet-good"))).sort()).toEqual([
      "flags.json",
      "report.html",
      "report.json",
      "report.txt",
    ]);
  });

  it("exits with 0 for a caution, with 1 when strict, and writes the same bytes both times", async () => {
    const words = ["check", "silent.uvfits", "--plan", "plan.yaml", "--quiet"];
    const [a, b] = [join(folder, "a"), join(folder, "b")];
    const lax = visvet(...words, "--out", a);
    expect(lax.out).toMatch(/^silent: caution /);
    expect([lax.status, visvet(...words, "--strict", "--out", b).status]).toEqual([0, 1]);
    for (const name of await readdir(a)) {
      expect((await readFile(join(a, name))).equals(await readFile(join(b, name))), name).toBe(true);
    }
  });

  it("exits with 1 for a hold, the worst of several datasets, and gives each a folder", async () => {
    const out = join(folder, "several");
    // Without a plan of its own the largest scale is that of the shortest spacing; ten arcminutes are out of reach.
    await writeFile(join(folder, "too-large.yaml"), "largest_scale: 30arcmin\n");
    const { status, out: said } = visvet(
      "check",
      "good.uvfits",
      "silent.uvfits",
      "--plan",
      "too-large.yaml",
      "--out",
      out,
      "--quiet",
    );
    expect(said).toMatch(/^good: hold .*\nsilent: hold /);
    expect(status).toBe(1);
    expect((await readdir(out)).sort()).toEqual(["good", "silent"]);
  });

  it("never alters its input, and judges one field alone", async () => {
    const copy = join(folder, "copy.uvfits");
    const before = await readFile(join(folder, "silent.uvfits"));
    await writeFile(copy, before, { mode: 0o444 });
    expect(visvet("check", copy, "--field", "1", "--quiet").out).toMatch(/^copy: /);
    expect((await readFile(copy)).equals(before)).toBe(true);
  });

  it("names the fields when there is none of an id", () => {
    const { status, err } = visvet("check", "good.uvfits", "--field", "9");
    expect(status).toBe(2);
    expect(err).toMatch(
      /there is no field "9": the fields are 1 Heron\. Name one of these with --field, by id or name\n$/,
    );
  });
});

describe("input that can not be judged", () => {
  it.each([
    ["a file that is not there", ["check", "nowhere.uvfits"], /nowhere\.uvfits/],
    ["no dataset", ["check"], /Not enough non-option arguments/],
    ["an option that does not exist", ["check", "good.uvfits", "--sctrict"], /sctrict/],
    ["a command that does not exist", ["chekc"], /chekc/],
    ["a plan that is not there", ["check", "good.uvfits", "--plan", "nowhere.yaml"], /nowhere\.yaml/],
    ["rules that are not there", ["check", "good.uvfits", "--rules", "nowhere"], /nowhere/],
  ])("exits with 2 and one line that says so: %s", (_, words, said) => {
    const { status, out, err } = visvet(...words);
    expect(status).toBe(2);
    expect(out).toBe("");
    expect(err.trimEnd().split("\n")).toHaveLength(1);
    expect(err).toMatch(said);
    expect(err).not.toMatch(/should not/);
  });

  it("names the byte and group where a file was cut", async () => {
    const cut = join(folder, "cut.uvfits");
    await writeFile(cut, await readFile(join(folder, "good.uvfits")));
    await truncate(cut, 50_000);
    const { status, err } = visvet("check", cut);
    expect(status).toBe(2);
    expect(err).toMatch(/cut\.uvfits, HDU 1 .*byte \d+.*: the header promises 840 groups/);
  });

  it("strips what a file name could do to the terminal", () => {
    const { status, err } = visvet("check", "\u001b[31mred\u202e.uvfits");
    expect(status).toBe(2);
    expect([...err].some((character) => "\u001b\u202e".includes(character))).toBe(false);
  });
});

describe("help", () => {
  it.each(["check", "describe", "explain", "simulate"])("shows examples of %s", (command) => {
    const { status, out } = visvet(command, "--help");
    expect(status).toBe(0);
    expect(out).toMatch(/Examples:/);
    expect(out.indexOf("Examples:")).toBeLessThan(out.indexOf("Options:"));
  });

  it("lists the commands", () => {
    const { out } = visvet("--help");
    for (const command of ["check", "describe", "explain", "simulate"])
      expect(out).toContain(`visvet ${command}`);
  });
});

describe("visvet describe", () => {
  it("says what is in a file", () => {
    const { status, out } = visvet("describe", "good.uvfits");
    expect(status).toBe(0);
    expect(out).toContain("Larkfield");
  });
});
