import { describe, expect, it } from "vitest";
import type { BlockRequest, Dataset } from "../../src/dataset/dataset.ts";
import { fieldNamed, fieldView } from "../../src/dataset/field-view.ts";
import { gridRows, memoryDataset } from "../support/memory-dataset.ts";
import { lineOfError, readAll } from "./read-all.ts";

const FIELD = { rightAscension: 1, declination: -0.5, equinox: 2000 };
const fields = [
  { ...FIELD, id: 1, name: "Heron" },
  { ...FIELD, id: 7, name: "GULL 2" },
  { ...FIELD, id: 2, name: "Twice" },
  { ...FIELD, id: 3, name: "twice" },
];
/** 45 baselines, 200 integrations: field 1 in the first and third quarter, 7 in the others. */
const rows = gridRows(10, 200).map((row, i) => ({ ...row, field: Math.floor(i / 2250) % 2 === 0 ? 1 : 7 }));
const dataset = memoryDataset({ rows, dataset: { fields } });

describe("fieldView", () => {
  it("gives any range of the field's rows", async () => {
    const view = await fieldView(dataset, 7);
    const own = rows.filter(({ field }) => field === 7);
    expect(view.rows).toBe(own.length);
    const all = await readAll(view, { want: "rows" });
    expect(all.time).toEqual(own.map(({ time }) => time));
    const part = await readAll(view, { want: "rows", rows: [2200, 2300] });
    expect(part.u).toEqual(all.u.slice(2200, 2300));
    expect(await readAll(view, { want: "rows", rows: [3, 3] })).toMatchObject({ time: [] });
  });

  it("does not read the rows of other fields where they are many", async () => {
    const asked: BlockRequest["rows"][] = [];
    const watched: Dataset = {
      ...dataset,
      blocks: (request) => {
        asked.push(request.rows);
        return dataset.blocks(request);
      },
    };
    const view = await fieldView(watched, 1);
    asked.length = 0;
    await readAll(view, { want: "rows" });
    expect(asked).toEqual([
      [0, 2250],
      [4500, 6750],
    ]);
  });
});

describe("fieldNamed", () => {
  it("takes an id or a name in any case", () => {
    expect(fieldNamed(dataset, "7").name).toBe("GULL 2");
    expect(fieldNamed(dataset, " heron ").id).toBe(1);
  });

  it("says which fields there are, and what may have been meant", async () => {
    const refusal = (asked: string) => lineOfError(Promise.resolve().then(() => fieldNamed(dataset, asked)));
    expect(await refusal("Herron")).toMatch(
      /there is no field "Herron": the fields are 1 Heron, 7 GULL 2, 2 Twice, 3 twice\. Did you mean "Heron"\?/,
    );
    expect(await refusal("twice")).toMatch(/2 fields are called "twice": 2, 3\. Give --field the id/);
    expect(await refusal("9")).toMatch(
      /there is no field "9".*Name one of these with --field, by id or name/,
    );
  });
});
