import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import * as z from "zod";
import { parseFlagFile } from "../../src/flags/flag-file.ts";
import { flagsJson, reportJson } from "../../src/report/json.ts";
import { cleanCheck, emptyCheck, faultyCheck, fixtureFlags, HOSTILE, hostileCheck } from "./fixtures.ts";

type Json = Record<string, unknown>;

function schema(name: string): Json {
  return JSON.parse(
    readFileSync(new URL(`../../src/report/schema/${name}.schema.json`, import.meta.url), "utf8"),
  );
}

/** Against the published schema, by zod's reader of JSON Schema (draft 2020-12). */
function problems(name: string, value: unknown): unknown[] {
  const result = z.fromJSONSchema(schema(name)).safeParse(value);
  return result.success
    ? []
    : result.error.issues.map((issue) => `${issue.path.join(".")}: ${issue.message}`);
}

const report = () => JSON.parse(reportJson(faultyCheck())) as Json;

describe("report.json", () => {
  it.each([
    ["a hold", faultyCheck()],
    ["clean data", cleanCheck()],
    [
      "nothing usable",
      {
        ...emptyCheck(),
        before: { ...emptyCheck().before, score: 0 },
        after: { ...emptyCheck().after, score: 0 },
      },
    ],
    ["hostile names", hostileCheck(HOSTILE.escapes)],
  ])("keeps to its published schema: %s", (_, check) => {
    expect(problems("report", JSON.parse(reportJson(check)))).toEqual([]);
    expect(problems("flags", JSON.parse(flagsJson(check)))).toEqual([]);
  });

  it("is refused by the schema when a part is missing or wrong", () => {
    const { image, ...rest } = report();
    expect(problems("report", rest)).toHaveLength(1);
    expect(problems("report", { ...rest, image, version: 2 })).toHaveLength(1);
    const findings = report().findings as Json[];
    findings[0]!.scope = { antenna: [7] };
    expect(problems("report", { ...rest, image, findings })[0]).toContain("findings.0.scope");
  });

  it("has the keys of the contract in their order", () => {
    expect(Object.keys(report())).toEqual([
      "format",
      "version",
      "tool",
      "dataset",
      "plan",
      "score",
      "scoreAfterFlags",
      "verdict",
      "findings",
      "flags",
      "image",
      "settings",
      "measures",
      "provenance",
    ]);
    expect(Object.keys((report().findings as Json[])[1]!)).toEqual([
      "rule",
      "family",
      "verdict",
      "severity",
      "title",
      "scope",
      "measured",
      "limits",
      "mendedByFlags",
      "consequence",
      "evidence",
      "suggests",
      "flags",
    ]);
  });

  it("counts the dataset as the contract says", () => {
    expect(report().dataset).toMatchObject({
      rows: 10_920,
      samples: 1_397_760,
      flagged: 212_940,
      bad: 4620,
      antennas: 14,
      baselines: 91,
      integrations: 120,
      channels: 32,
      subbands: 2,
      polarizations: 2,
      fields: 1,
    });
  });

  it("rounds the scores and keeps the words of the verdict", () => {
    expect(report()).toMatchObject({ score: 46, scoreAfterFlags: 68, verdict: "hold" });
  });

  it("writes what is unknown as null and keeps seven digits of what is known", () => {
    const columns = (report().measures as Record<string, { columns: { name: string; values: unknown[] }[] }>)
      .antenna!.columns;
    const values = Object.fromEntries(columns.map((column) => [column.name, column.values]));
    expect(values.noise_jy).toEqual([0.29, null, 0.31]);
    expect(values.flagged_fraction).toEqual([0.1523457, 0.152, 0.16]);
  });

  it("keeps times to the last bit: they choose integrations", () => {
    const scope = (report().findings as { scope: { time?: unknown } }[])[1]!.scope;
    expect(scope.time).toEqual(faultyCheck().findings[1]!.scope.time);
  });

  it("names files without their folders, so that the place does not change the bytes", () => {
    const here = faultyCheck();
    const there = faultyCheck({ ...here.dataset, files: ["/elsewhere/deep/quillon-night12.uvfits"] });
    expect(reportJson(there)).toBe(reportJson(here));
  });

  it("is the same bytes for the same check", () => {
    expect(reportJson(faultyCheck())).toBe(reportJson(faultyCheck()));
    expect(flagsJson(faultyCheck())).toBe(flagsJson(faultyCheck()));
  });

  it.each(Object.entries(HOSTILE))(
    "keeps hostile names whole, but shows no character that a terminal obeys (%s)",
    (_, name) => {
      const text = reportJson(hostileCheck(name));
      expect(text.replaceAll("\n", "")).not.toMatch(/[\p{Cc}\p{Cf}\p{Zl}\p{Zp}]/u);
      expect((JSON.parse(text) as { dataset: Json }).dataset.name).toBe(name);
    },
  );
});

describe("flags.json", () => {
  it("is read back by its reader to the same selections", () => {
    const read = parseFlagFile(flagsJson(faultyCheck()), "flags.json");
    const written = fixtureFlags();
    expect(read.dataset).toBe("quillon-night12");
    expect(read.entries.map(({ cost, fraction, ...rest }) => rest)).toEqual(
      written.map(({ cost, fraction, ...rest }) => rest),
    );
    expect(read.entries[2]!.cost.beamMajorChangeFraction).toBeNaN();
  });

  it("describes an entry as report.json does", () => {
    const [flags, whole] = [schema("flags"), schema("report")] as { $defs: Json }[];
    expect(flags!.$defs.flag).toEqual(whole!.$defs.flag);
    expect(flags!.$defs.cost).toEqual(whole!.$defs.cost);
    expect((report().flags as Json).entries).toEqual((JSON.parse(flagsJson(faultyCheck())) as Json).entries);
  });
});
