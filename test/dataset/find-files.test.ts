import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, describe, expect, it } from "vitest";
import { findFiles } from "../../src/dataset/find-files.ts";
import { lineOfError } from "./read-all.ts";

const folder = mkdtempSync(join(tmpdir(), "find-"));
afterAll(() => rmSync(folder, { recursive: true }));
for (const name of ["day1/inner", "day2", "empty"]) mkdirSync(join(folder, name), { recursive: true });
for (const name of [
  "day1/p10",
  "day1/p2",
  "day1/.hidden",
  "day1/inner/p3",
  "day2/p1",
  "day2/q1",
  "odd[1].fits",
]) {
  writeFileSync(join(folder, name), "x");
}
const found = async (name: string) =>
  (await findFiles(join(folder, name))).paths.map((path) => path.slice(folder.length + 1));

describe("findFiles", () => {
  it("gives the files of a folder, numbers in order, hidden ones and inner folders left out", async () => {
    expect(await found("day1")).toEqual(["day1/p2", "day1/p10"]);
  });

  it("gives what a glob matches, once each", async () => {
    expect(await found("day?/p*")).toEqual(["day1/p2", "day1/p10", "day2/p1"]);
    expect(await found("day[!1]/*")).toEqual(["day2/p1", "day2/q1"]);
    expect(await found("**/p*")).toEqual(["day1/inner/p3", "day1/p2", "day1/p10", "day2/p1"]);
    expect(await found("day1/**/p*")).toEqual(["day1/inner/p3", "day1/p2", "day1/p10"]);
    expect(await found("day1/.h*")).toEqual(["day1/.hidden"]);
  });

  it("takes a name that is there as it is, brackets and all", async () => {
    expect(await findFiles(join(folder, "odd[1].fits"))).toMatchObject({
      paths: [join(folder, "odd[1].fits")],
      searched: false,
    });
  });

  it("names each file of a list once, in the order given", async () => {
    const { paths } = await findFiles([join(folder, "day2"), join(folder, "day2/p1")]);
    expect(paths).toEqual([join(folder, "day2/p1"), join(folder, "day2/q1")]);
  });

  it("says that nothing matches, or that a folder is empty, and what to do", async () => {
    expect(await lineOfError(findFiles(join(folder, "night*")))).toMatch(
      /night\*: no file matches\. Quote the pattern/,
    );
    expect(await lineOfError(findFiles(join(folder, "empty")))).toMatch(
      /empty: there is no file in this folder\. Folders inside it are not searched/,
    );
    expect(await lineOfError(findFiles([]))).toContain("no file is named");
  });
});
