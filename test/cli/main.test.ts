import { spawnSync } from "node:child_process";
import { mkdtemp, readdir, readFile, rm, truncate, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";

/** The program as a user has it: built by `npm test` before the tests. */
const MAIN = fileURLToPath(new URL("../../dist/cli/main.js", import.meta.url));
const SAMPLES = fileURLToPath(new URL("../../sample-inputs", import.meta.url));

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-main-"));
});
afterAll(() => rm(folder, { recursive: true, force: true }));

function visvet(...words: readonly string[]) {
  const run = spawnSync(process.execPath, [MAIN, ...words], { cwd: folder, encoding: "utf8" });
  return { status: run.status, out: run.stdout, err: run.stderr };
}

const sample = (name: string) => join(SAMPLES, `${name}.uvfits`);
const plan = (name: string) => ["--plan", join(SAMPLES, `${name}.plan.yaml`)];

describe("visvet check", () => {
  it("exits with 0 for a dataset that is ready, and writes the four files", async () => {
    const { status, out, err } = visvet("check", sample("clean"), ...plan("clean"));
    expect([status, err]).toEqual([0, ""]);
    expect(out.split("\n")[0]).toBe("READY: clean");
    expect((await readdir(join(folder, "visvet-clean"))).sort()).toEqual([
      "flags.json",
      "report.html",
      "report.json",
      "report.txt",
    ]);
  });

  it("writes the same bytes for the same input", async () => {
    const [a, b] = [join(folder, "a"), join(folder, "b")];
    for (const out of [a, b])
      visvet("check", sample("three-faults"), ...plan("three-faults"), "--out", out, "--quiet");
    for (const name of await readdir(a)) {
      expect((await readFile(join(a, name))).equals(await readFile(join(b, name))), name).toBe(true);
    }
  });

  it("exits with 1 for a hold", () => {
    const { status, out } = visvet("check", sample("wide-field"), ...plan("wide-field"), "--quiet");
    expect(out).toMatch(/^wide-field: hold \(score \d+/);
    expect(status).toBe(1);
  });

  it("exits with 1 for a caution when strict, with 0 otherwise", () => {
    const words = ["check", sample("three-faults"), ...plan("three-faults"), "--quiet"];
    expect(visvet(...words).out).toMatch(/^three-faults: caution /);
    expect(visvet(...words).status).toBe(0);
    expect(visvet(...words, "--strict").status).toBe(1);
  });

  it("takes the worst of several datasets and gives each a folder", async () => {
    const out = join(folder, "several");
    const { status } = visvet("check", sample("clean"), sample("holes"), "--out", out, "--quiet");
    expect(status).toBe(1);
    expect((await readdir(out)).sort()).toEqual(["clean", "holes"]);
  });

  it("never alters its input", async () => {
    const copy = join(folder, "copy.uvfits");
    const before = await readFile(sample("three-faults"));
    await writeFile(copy, before, { mode: 0o444 });
    visvet("check", copy, "--quiet");
    expect((await readFile(copy)).equals(before)).toBe(true);
  });

  it("judges one field alone", () => {
    expect(visvet("check", sample("clean"), "--field", "1", "--quiet").status).toBe(0);
    const { status, err } = visvet("check", sample("clean"), "--field", "9");
    expect(status).toBe(2);
    expect(err).toMatch(/there is no field 9: the fields are 1\. Name one of these with --field\n$/);
  });
});

describe("input that can not be judged", () => {
  it.each([
    ["a file that is not there", ["check", "nowhere.uvfits"], /nowhere\.uvfits/],
    ["no dataset", ["check"], /Not enough non-option arguments/],
    ["an option that does not exist", ["check", sample("clean"), "--sctrict"], /sctrict/],
    ["a command that does not exist", ["chekc"], /chekc/],
    ["a plan that is not there", ["check", sample("clean"), "--plan", "nowhere.yaml"], /nowhere\.yaml/],
    ["rules that are not there", ["check", sample("clean"), "--rules", "nowhere"], /nowhere/],
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
    await writeFile(cut, await readFile(sample("clean")));
    await truncate(cut, 1_000_000);
    const { status, err } = visvet("check", cut);
    expect(status).toBe(2);
    expect(err).toMatch(/cut\.uvfits, HDU 1 .*byte \d+.*: the header promises 5460 groups/);
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
    const { status, out } = visvet("describe", sample("clean"));
    expect(status).toBe(0);
    expect(out).toContain("Larkfield");
  });
});
