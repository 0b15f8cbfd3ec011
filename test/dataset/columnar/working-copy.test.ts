import { existsSync, mkdirSync, readdirSync, rmSync, statSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, describe, expect, it } from "vitest";
import { openColumnar } from "../../../src/dataset/columnar/open.ts";
import { SPOOL_PREFIX } from "../../../src/dataset/columnar/spool.ts";
import { reopen } from "../../../src/dataset/recipe.ts";
import { readAll } from "../../support/read-all.ts";
import { lineOfError } from "../read-all.ts";
import { csvOf, folder, gridSamples, tableFile } from "./table-text.ts";

afterAll(() => rmSync(folder, { recursive: true, force: true }));

const ours = () => readdirSync(tmpdir()).filter((name) => name.startsWith(`${SPOOL_PREFIX}${process.pid}-`));

describe("The working copy of a table", () => {
  it("that a killed process left is taken away", async () => {
    // No process has a number this large (Linux: at most 2^22).
    const left = join(tmpdir(), `${SPOOL_PREFIX}9999999-0123456789abcdef`);
    mkdirSync(left);
    writeFileSync(join(left, "samples"), "x");
    await openColumnar([tableFile(csvOf(gridSamples(3, 1, 1)))]);
    expect(existsSync(left)).toBe(false);
  });

  it("is made once, for its own eyes, and serves whoever opens the table again", async () => {
    const path = tableFile(csvOf(gridSamples(3, 4, 2)));
    const before = ours();
    const dataset = await openColumnar([path]);
    const made = ours().filter((name) => !before.includes(name));
    expect(made).toHaveLength(1);
    expect(statSync(join(tmpdir(), made[0]!)).mode & 0o777).toBe(0o700);
    const again = await reopen(structuredClone(dataset.recipe!));
    expect(ours().filter((name) => !before.includes(name))).toEqual(made);
    expect(await readAll(again)).toEqual(await readAll(dataset));
    expect(again.notes).toEqual(dataset.notes);
  });

  it("is made anew when the table has changed", async () => {
    const path = tableFile(csvOf(gridSamples(3, 4, 2)));
    expect((await openColumnar([path])).rows).toBe(12);
    writeFileSync(path, csvOf(gridSamples(3, 5, 2)));
    expect((await openColumnar([path])).rows).toBe(15);
  });

  it("is not left behind when the table is malformed", async () => {
    const before = ours();
    const text = csvOf(gridSamples(3, 4, 2)).replace("10.25", "ten");
    expect(await lineOfError(openColumnar([tableFile(text)]))).toContain("is not a number");
    expect(ours()).toEqual(before);
  });
});
