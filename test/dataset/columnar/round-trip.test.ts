import { mkdtemp, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openColumnar } from "../../../src/dataset/columnar/open.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { type TableLayout, writeColumnar } from "../../../src/simulate/write-columnar.ts";
import { readAll, sameBits } from "../../support/read-all.ts";

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-test-"));
});
afterAll(() => rm(folder, { recursive: true, force: true }));

describe("A dataset written as a table and read again", () => {
  const cases = ["parquet", "arrow", "csv", "tsv"].flatMap((suffix) =>
    (["sample", "row"] as const).map((layout): [string, TableLayout] => [suffix, layout]),
  );
  it.each(cases)("is the same to the last bit: %s, one row a %s", async (suffix, layout) => {
    const original = await openDataset("sample-inputs/formats.uvfits");
    const path = join(folder, `${layout}-${suffix}.${suffix}`);
    await writeColumnar(original, path, { layout, blockRows: 401 });
    const table = await openColumnar([path]);
    const [was, is] = [await readAll(original), await readAll(table)];
    for (const key of Object.keys(was) as (keyof typeof was)[]) {
      const [a, b] = [was[key], is[key]];
      if (a instanceof Float32Array || a instanceof Float64Array) {
        expect(sameBits(a, b as typeof a), key).toBe(true);
      } else expect(b, key).toEqual(a);
    }
    expect(table.notes).toEqual([]);
    for (const key of ["array", "fields", "setups", "polarizations", "shape", "unit", "header"] as const) {
      expect(table[key], key).toEqual(original[key]);
    }
  });
});
