import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import * as z from "zod";
import { checkDataset } from "../../src/report/check.ts";
import { fieldNotes } from "../../src/report/field-table.ts";
import { MOST_FIELDS } from "../../src/report/fields.ts";
import { writeHtml } from "../../src/report/html.ts";
import { reportJson } from "../../src/report/json.ts";
import { writeText } from "../../src/report/text.ts";
import { loadRules } from "../../src/rules/load.ts";
import { simulated } from "../support/scenarios.ts";

const rules = await loadRules();
/** Two fields in turn; an antenna is dead in the first scan of one, interference in the first of the other. */
const { dataset } = simulated({
  time: { duration: "24min", scan: "6min", integration: "20s" },
  frequency: { channels: 12 },
  fields: [
    { name: "Heron", ra: "8h30m", dec: "-28d" },
    { name: "Gull", ra: "8h36m", dec: "-12d" },
  ],
  faults: [
    { kind: "silent-antenna", antenna: 4, time: ["0min", "6min"] },
    { kind: "persistent-line", channels: "5", amplitude: "8 sigma", time: ["6min", "12min"] },
  ],
});
const check = await checkDataset(dataset, { plan: {}, rules });
const [heron, gull] = check.byField!.judged;

describe("fields of a dataset", () => {
  it("are each judged by their own data", () => {
    const found = (field: typeof heron) => new Set(field!.findings.map(({ rule }) => rule));
    expect(found(heron)).toContain("silent-antenna");
    expect(found(heron)).not.toContain("burst");
    expect([...found(gull)].some((rule) => rule === "burst" || rule === "persistent-line")).toBe(true);
    expect(found(gull)).not.toContain("silent-antenna");
    expect(heron!.score).toBeLessThan(gull!.score);
    for (const field of [heron!, gull!]) expect(field.scoreAfterFlags).toBeGreaterThan(field.score);
  });

  it("have an image of their own: the beam of a field nearer the equator is longer", () => {
    const beam = (field: typeof heron) => field!.image.weightings.find(({ planned }) => planned)!.before;
    // The array lies at -31 deg: north-south spacings of Gull are foreshortened by cos(19 deg) / cos(3 deg).
    expect(beam(gull).majorArcsec).not.toBeCloseTo(beam(heron).majorArcsec, 1);
    expect(heron!.rows + gull!.rows).toBe(dataset.rows);
    expect(heron!.weightFraction + gull!.weightFraction).toBeCloseTo(1, 12);
  });

  it("stand in every report, and the main one is named", () => {
    const text = writeText(check, { width: 90, colour: false });
    expect(text).toContain("Field by field");
    expect(text).toMatch(/1 Heron +Caution +\d+ +\d+ +\d+ %/);
    expect(text).toContain("An antenna without fringes");
    const page = writeHtml(check);
    expect(page).toContain('<a href="#fields">Fields</a>');
    expect(page).toMatch(/<h2 id="fields">Field by field<\/h2>/);
    const report = JSON.parse(reportJson(check));
    expect(report.byField.judged.map((one: { name: string; main: boolean }) => [one.name, one.main])).toEqual(
      [
        ["Heron", check.byField!.main === 1],
        ["Gull", check.byField!.main === 2],
      ],
    );
    const schema = readFileSync(
      new URL("../../src/report/schema/report.schema.json", import.meta.url),
      "utf8",
    );
    expect(z.fromJSONSchema(JSON.parse(schema)).safeParse(report).error).toBeUndefined();
  });

  it("are not told apart where there is one alone", async () => {
    const single = { ...check, byField: null };
    expect(writeText(single, { width: 90, colour: false })).not.toContain("Field by field");
    expect(writeHtml(single)).not.toContain("#fields");
    expect(reportJson(single)).not.toContain('"byField"');
  });

  it("that are too many or empty are counted in words", () => {
    const left = [
      ...Array.from({ length: 30 }, (_, k) => ({ id: 20 + k, name: "P", usable: true, why: "lighter" })),
      { id: 70, name: "Blank", usable: false, why: "no usable sample" },
    ];
    const judged = Array.from({ length: MOST_FIELDS }, () => heron!);
    const notes = fieldNotes({ judged, left, main: 1 });
    expect(notes).toContain("No usable sample: field 70 Blank.");
    expect(notes.at(-1)).toMatch(/^Of 43 fields the 12 heaviest are judged on their own; 30 lighter ones/);
  });
});
