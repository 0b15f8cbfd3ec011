import { mkdtemp, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { writeReports } from "../../src/report/write-reports.ts";
import { InputError } from "../../src/util/errors.ts";
import { cleanCheck, faultyCheck } from "./fixtures.ts";

let folder: string;
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-reports-"));
});
afterEach(async () => {
  await rm(folder, { recursive: true, force: true });
});

const NAMES = ["flags.json", "report.html", "report.json", "report.txt"];

describe("writeReports", () => {
  it("writes the four files, makes the folder, and leaves nothing else there", async () => {
    const out = join(folder, "deep", "out");
    const paths = await writeReports(faultyCheck(), out);
    expect(paths).toEqual(
      ["report.html", "report.txt", "report.json", "flags.json"].map((name) => join(out, name)),
    );
    expect((await readdir(out)).sort()).toEqual(NAMES);
    expect(await readFile(join(out, "report.txt"), "utf8")).toMatch(/^HOLD: quillon-night12\n/);
  });

  it("replaces an earlier check's files, and writes the same bytes again", async () => {
    await writeReports(faultyCheck(), folder);
    await writeReports(cleanCheck(), folder);
    await writeReports(faultyCheck(), folder);
    const once = await Promise.all(NAMES.map((name) => readFile(join(folder, name), "utf8")));
    await writeReports(faultyCheck(), folder);
    const twice = await Promise.all(NAMES.map((name) => readFile(join(folder, name), "utf8")));
    expect(twice).toEqual(once);
  });

  it("says what stands in the way of its folder", async () => {
    const path = join(folder, "taken");
    await writeFile(path, "a file");
    const error = await writeReports(cleanCheck(), path).catch((reason: unknown) => reason);
    expect(error).toBeInstanceOf(InputError);
    expect((error as InputError).line).toMatch(
      /taken: the folder cannot be made \(EEXIST\)\. Something else has that name/,
    );
  });
});
