/** Measures as tables: typed, documented, with NaN and missing cells kept apart in every format. */
import { mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { tableFromIPC } from "apache-arrow";
import { parse } from "csv-parse/sync";
import { parquetMetadata, parquetReadObjects } from "hyparquet";
import { afterAll, describe, expect, it } from "vitest";
import { eventMeasures } from "../../src/detect/event-table.ts";
import { fillMeasure } from "../../src/measure/fill-measure.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import type { Measure } from "../../src/measure/table.ts";
import { measureTable, writeTables } from "../../src/report/write-tables.ts";
import { tableBytes } from "../../src/util/column-table.ts";
import { simulated } from "../support/scenarios.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-tables-"));
afterAll(() => rmSync(folder, { recursive: true }));

/** A measure with what is awkward in it: unknown, missing, hostile, huge, tiny, signed zero. */
const ODD: Measure = fillMeasure(
  {
    name: "odd",
    each: "antenna",
    title: "What is awkward",
    columns: [
      { name: "antenna", unit: "", meaning: "its number" },
      { name: "name", unit: "", meaning: 'its name, "as written"' },
      { name: "height_m", unit: "m", meaning: "height" },
    ],
  },
  [
    { antenna: 1, name: 'a "quoted", name\nof two lines', height_m: 1 / 3 },
    { antenna: null, name: null, height_m: Number.NaN },
    { antenna: -7, name: "", height_m: -0 },
    { antenna: 2 ** 31 - 1, name: " ☃ ", height_m: Number.POSITIVE_INFINITY },
    { antenna: 0, name: "=1+1", height_m: 5e-324 },
  ],
);
const odd = measureTable(ODD);
const CELLS = {
  antenna: [1, null, -7, 2 ** 31 - 1, 0],
  name: ['a "quoted", name\nof two lines', null, "", " ☃ ", "=1+1"],
  height_m: [1 / 3, Number.NaN, -0, Number.POSITIVE_INFINITY, 5e-324],
};

describe("a table", () => {
  it("has types that do not depend on the rows", () => {
    expect(odd.columns.map(({ type }) => type)).toEqual(["integer", "text", "number"]);
    const empty = measureTable(fillMeasure({ ...ODD, columns: ODD.columns }, []));
    expect(empty.columns.map(({ type }) => type)).toEqual(["integer", "text", "number"]);
  });

  it("keeps every cell in Parquet, and says what columns mean", async () => {
    const bytes = await tableBytes(odd, "parquet");
    const buffer = bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.length) as ArrayBuffer;
    const rows = await parquetReadObjects({ file: buffer });
    for (const [name, values] of Object.entries(CELLS)) {
      expect(rows.map((row) => row[name])).toEqual(
        values.map((value) => value ?? undefined).map((v) => v ?? null),
      );
    }
    const { key_value_metadata: about } = parquetMetadata(buffer);
    expect(about).toContainEqual({ key: "column.height_m", value: "height (m)" });
  });

  it("keeps every cell in Arrow, and says what columns mean", async () => {
    const table = tableFromIPC(await tableBytes(odd, "arrow"));
    for (const [name, values] of Object.entries(CELLS)) {
      expect(Array.from(table.getChild(name)!), name).toEqual(values);
    }
    expect(table.schema.fields[2]!.metadata.get("meaning")).toBe("height");
    expect(table.schema.metadata.get("title")).toBe("What is awkward");
  });

  it("keeps every cell in CSV: empty is missing, quotes are an empty text, NaN is unknown", async () => {
    const text = Buffer.from(await tableBytes(odd, "csv")).toString("utf8");
    expect(text.split("\n").slice(3)).toEqual([
      ",,NaN",
      '-7,"",0',
      '2147483647," ☃ ",inf',
      "0,=1+1,5e-324",
      "",
    ]);
    const [, first] = parse(text) as string[][];
    expect(first).toEqual(["1", CELLS.name[0], String(1 / 3)]);
  });

  it("may have no rows, in every format", async () => {
    const empty = measureTable(fillMeasure({ ...ODD, columns: ODD.columns }, []));
    expect(Buffer.from(await tableBytes(empty, "csv")).toString()).toBe("antenna,name,height_m\n");
    expect(tableFromIPC(await tableBytes(empty, "arrow")).numRows).toBe(0);
    const bytes = await tableBytes(empty, "parquet");
    const buffer = bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.length) as ArrayBuffer;
    expect(Number(parquetMetadata(buffer).num_rows)).toBe(0);
  });
});

describe("writeTables", () => {
  it("writes every measure, and describes every column of each", async () => {
    const { dataset } = simulated({ time: { start: "2026-03-01T12:00:00", duration: "1min" } });
    const survey = await surveyDataset(dataset);
    const all = [...survey.measures.values(), ...eventMeasures(survey, []), ODD];
    const measures = new Map(all.map((measure) => [measure.name, measure]));
    const paths = await writeTables({ measures }, folder, "csv");
    expect(readdirSync(join(folder, "tables")).sort()).toEqual(
      ["columns.csv", ...[...measures.keys()].map((name) => `${name}.csv`)].sort(),
    );
    expect(paths[0]).toBe(join(folder, "tables", "columns.csv"));
    const [head, ...rows] = parse(readFileSync(paths[0]!, "utf8")) as string[][];
    expect(head).toEqual(["table", "row", "column", "type", "unit", "meaning", "missing_values"]);
    for (const measure of all) {
      const [names] = parse(
        readFileSync(join(folder, "tables", `${measure.name}.csv`), "utf8"),
      ) as string[][];
      expect(rows.filter(([table]) => table === measure.name).map(([, , column]) => column)).toEqual(names);
    }
    expect(rows.every((row) => row[5] !== "" && row[6] !== "")).toBe(true);
  });
});
