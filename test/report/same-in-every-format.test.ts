/** The same observation gives the same reports, whatever format holds it; only what is said of the file itself differs. */
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { openDataset } from "../../src/dataset/open.ts";
import { checkDataset } from "../../src/report/check.ts";
import { writeHtml } from "../../src/report/html.ts";
import { flagsJson, reportJson } from "../../src/report/json.ts";
import type { Check } from "../../src/report/report.ts";
import { writeText } from "../../src/report/text.ts";
import { loadRules } from "../../src/rules/load.ts";

const rules = await loadRules([]);

function sample(name: string): string {
  return fileURLToPath(new URL(`../../sample-inputs/${name}`, import.meta.url));
}

async function checkOf(name: string): Promise<Check> {
  return checkDataset(await openDataset(sample(name)), { plan: {}, rules });
}

const groups = await checkOf("formats.uvfits");

/** Without the line that says which file this is. */
function withoutFile(text: string): string[] {
  return text.split("\n").filter((line) => !/^ {2}File {7}|<dt>File<\/dt>/.test(line));
}

/** The words of a report that describe the file and not the observation. */
interface FileWords {
  dataset: { format?: string; bytes?: number; files?: string[]; header?: object };
  provenance: { bytes?: number; files?: string[] };
}

function withoutFileWords(json: string): FileWords {
  const report = JSON.parse(json) as FileWords;
  for (const part of [report.dataset, report.provenance]) {
    delete part.bytes;
    delete part.files;
  }
  delete report.dataset.format;
  delete report.dataset.header;
  return report;
}

describe("the report on the sample", () => {
  it.each(["formats.idifits"])("in %s is that on random groups", async (name) => {
    const check = await checkOf(name);
    const text = (one: Check) => writeText(one, { width: 80, colour: false });
    expect(withoutFile(text(check))).toEqual(withoutFile(text(groups)));
    expect(text(check)).not.toBe(text(groups));
    expect(withoutFileWords(reportJson(check))).toEqual(withoutFileWords(reportJson(groups)));
    expect(flagsJson(check)).toBe(flagsJson(groups));
    expect(withoutFile(writeHtml(check))).toEqual(withoutFile(writeHtml(groups)));
    // It says something: both faults of the scenario are found, and nothing is noted of the file.
    expect(check.events.map(({ kind }) => kind).sort()).toEqual(["persistent-line", "silent-antenna"]);
    expect([check.dataset.notes, groups.dataset.notes]).toEqual([[], []]);
  });
});
