import { beforeAll, describe, expect, it } from "vitest";
import { openDataset } from "../../../src/dataset/open.ts";
import { checkDataset } from "../../../src/report/check.ts";
import { flagsJson, reportJson } from "../../../src/report/json.ts";
import { writeText } from "../../../src/report/text.ts";
import { loadRules } from "../../../src/rules/load.ts";

interface Reports {
  readonly text: string;
  readonly json: string;
  readonly flags: string;
}

async function reportsOf(path: string): Promise<Reports> {
  const dataset = await openDataset(path);
  const check = await checkDataset(dataset, { plan: {}, rules: await loadRules([]) });
  const text = writeText(check, { width: 100, colour: false });
  const json = reportJson(check);
  return {
    // The one line that is of the file: its format and bytes.
    text: text.replace(/^ *File .*$/m, ""),
    json: withoutFile(json),
    flags: flagsJson(check),
  };
}

/** Format, name and bytes are the file's own. */
function withoutFile(json: string): string {
  const report = JSON.parse(json) as {
    dataset: Record<string, unknown>;
    provenance: Record<string, unknown>;
  };
  delete report.dataset.format;
  delete report.provenance.files;
  delete report.provenance.bytes;
  return JSON.stringify(report, null, 1);
}

describe("The same observation in tables and in random groups", () => {
  let expected: Reports;
  beforeAll(async () => {
    expected = await reportsOf("sample-inputs/formats.uvfits");
  });

  it.each(["formats.parquet", "formats.arrow", "formats.csv"])("is judged alike: %s", async (name) => {
    const found = await reportsOf(`sample-inputs/${name}`);
    expect(found.flags).toBe(expected.flags);
    expect(found.text).toBe(expected.text);
    expect(found.json).toBe(expected.json);
  });

  it("has a report worth comparing", () => {
    expect(expected.flags).toContain('"antennas": [4]');
    expect(expected.text.length).toBeGreaterThan(1000);
  });
});
