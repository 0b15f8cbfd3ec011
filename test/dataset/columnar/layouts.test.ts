import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, describe, expect, it } from "vitest";
import { openColumnar } from "../../../src/dataset/columnar/open.ts";
import type { Dataset } from "../../../src/dataset/dataset.ts";
import { checkDataset } from "../../../src/report/check.ts";
import { writeText } from "../../../src/report/text.ts";
import { loadRules } from "../../../src/rules/load.ts";
import { writeColumnar } from "../../../src/simulate/write-columnar.ts";
import { gridRows, memoryDataset } from "../../support/memory-dataset.ts";
import { readAll, sameBits } from "../../support/read-all.ts";
import { lineOfError } from "../read-all.ts";
import { csvOf, gridSamples, tableFile, folder as tables } from "./table-text.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-test-layouts-"));
afterAll(() => {
  rmSync(folder, { recursive: true, force: true });
  rmSync(tables, { recursive: true, force: true });
});

/** Fields, setups, sub-arrays and integrations that differ; odd numbers; flags; u, v, w in double precision. */
function oddDataset(more: Partial<Dataset> = {}): Dataset {
  const rows = gridRows(4, 3).map((row, i) => ({
    ...row,
    u: (row.u ?? 0) / 3,
    field: i % 2 === 0 ? 4 : 9,
    setup: i % 3 === 0 ? 1 : 0,
    subarray: 1 + (i % 2),
    integration: 5 + (i % 4),
  }));
  const odd = [Number.NaN, Number.POSITIVE_INFINITY, -0, 1e-42, 3.4e38, 1 / 3];
  return memoryDataset({
    rows,
    subbands: 2,
    channels: 3,
    polarizations: ["XX", "XY", "YX"],
    sample: (row, subband, channel, polarization) => {
      const i = row + subband + channel + polarization;
      return [odd[i % 6]!, Math.fround(-i / 7), i % 5 === 0 ? -2 : i % 7 === 0 ? Number.NaN : 0.1 * i];
    },
    dataset: {
      setups: [
        {
          id: 3,
          frequencies: Float64Array.of(1e9, 2e9, 3e9, 5e9, 6e9, 7e9),
          channelWidths: Float64Array.of(1e8, 2e8),
        },
        {
          id: 8,
          frequencies: Float64Array.of(9e9, 8e9, 7e9, 4e9, 3e9, 2e9),
          channelWidths: Float64Array.of(1e8, 1e8),
        },
      ],
      ...more,
    },
  });
}

describe("A dataset of several fields, setups, sub-arrays and odd numbers", () => {
  it.each([
    ["parquet", "row"],
    ["arrow", "row"],
    ["csv", "row"],
    ["parquet", "sample"],
    ["arrow", "sample"],
    ["tsv", "sample"],
  ] as const)("comes back to the last bit: %s, one row a %s", async (suffix, layout) => {
    const original = oddDataset();
    const path = join(folder, `odd-${layout}-${suffix}.${suffix}`);
    await writeColumnar(original, path, { layout, blockRows: 7 });
    const table = await openColumnar([path]);
    const [was, is] = [await readAll(original), await readAll(table)];
    for (const key of ["time", "u", "v", "w", "integration", "real", "imag", "weight"] as const) {
      expect(sameBits(was[key], is[key]), key).toBe(true);
    }
    for (const key of ["antenna1", "antenna2", "subarray", "field", "setup"] as const) {
      expect(is[key], key).toEqual(was[key]);
    }
    for (const key of ["fields", "setups", "polarizations", "shape"] as const) {
      expect(table[key], key).toEqual(original[key]);
    }
  });

  it("without weights keeps its flags", async () => {
    const rows = gridRows(3, 2);
    const original = memoryDataset({
      rows,
      channels: 2,
      sample: (row, _, channel) => [row, channel, row === 1 ? -1 : 1],
      dataset: { hasWeights: false },
    });
    for (const suffix of ["parquet", "arrow", "csv"]) {
      const path = join(folder, `plain.${suffix}`);
      await writeColumnar(original, path);
      const table = await openColumnar([path]);
      expect(table.hasWeights).toBe(false);
      expect([...(await readAll(table)).weight]).toEqual([...(await readAll(original)).weight]);
    }
  });

  it("is never written over", async () => {
    const path = join(folder, "twice.csv");
    await writeColumnar(oddDataset(), path);
    await expect(writeColumnar(oddDataset(), path)).rejects.toThrow("already");
    await writeColumnar(oddDataset(), path, { overwrite: true });
  });
});

describe("Lists", () => {
  const head = "mjd,ant1,ant2,u_m,v_m,w_m";
  const constants =
    "constants: { polarizations: [RR, LL], frequencies: { start: 1GHz, step: 1MHz, channels: 2 } }\n";
  const row = "60000,1,2,1,2,3";

  it("run along the axes that no column has", async () => {
    const text = `${head},real,imag\n${row},[1 2 3 4],"[5, 6, 7, 8]"\n`;
    const dataset = await openColumnar([tableFile(text, { map: constants })]);
    const all = await readAll(dataset);
    expect([...all.real]).toEqual([1, 2, 3, 4]);
    expect([...all.imag]).toEqual([5, 6, 7, 8]);
    expect(dataset.notes.map(({ text }) => text).join()).toContain("subband x channel x polarization");
  });

  it("run in the order that the map gives", async () => {
    const text = `${head},real,imag\n${row},[1 2 3 4],[0 0 0 0]\n`;
    const map = `lists: [polarization, channel]\n${constants}`;
    expect([...(await readAll(await openColumnar([tableFile(text, { map })]))).real]).toEqual([1, 3, 2, 4]);
  });

  it("of each sub-band are gathered into one row", async () => {
    const map =
      "constants:\n  polarizations: [RR]\n  frequencies: [[1GHz, 2GHz], [3GHz, 4GHz]]\n  channel_width: [1MHz, 2MHz]\n";
    const text = `${head},subband,real,imag,flag\n${row},2,[3 4],[0 0],[0 1]\n${row},1,[1 2],[0 0],0\n`;
    const dataset = await openColumnar([tableFile(text, { map })]);
    const all = await readAll(dataset);
    expect(dataset.rows).toBe(1);
    expect([...all.real]).toEqual([1, 2, 3, 4]);
    expect([...all.weight]).toEqual([1, 1, 1, -1]);
    expect(dataset.setups[0]!.channelWidths).toEqual(Float64Array.of(1e6, 2e6));
  });

  it("of frequencies tell the channels", async () => {
    const map = "constants: { polarizations: [RR] }\n";
    const text = `${head},freq_MHz,real,imag\n${row},[1000 1001 1002],[1 2 3],[0 0 0]\n${row},[1000 1001 1002],,\n`;
    const dataset = await openColumnar([tableFile(text, { map })]);
    expect(dataset.setups[0]!.frequencies).toEqual(Float64Array.of(1e9, 1.001e9, 1.002e9));
    // The second row holds nothing: flagged, all of it.
    expect([...(await readAll(dataset)).weight]).toEqual([1, 1, 1, 0, 0, 0]);
  });

  it("of another length are named with their row", async () => {
    const text = `${head},real,imag\n${row},[1 2 3 4],[0 0 0 0]\n${row},[1 2 3],[0 0 0 0]\n`;
    expect(await lineOfError(openColumnar([tableFile(text, { map: constants })]))).toContain(
      'row 2: the list in column "real" has 3 elements: expected 4',
    );
    const short = `${head},real,imag\n${row},[1 2 3],[0 0 0]\n`;
    expect(await lineOfError(openColumnar([tableFile(short, { map: constants })]))).toContain(
      "the lists have 3 elements: expected 4",
    );
  });

  it("without polarizations or frequencies cannot be read, and the message says what to give", async () => {
    const text = `${head},real,imag\n${row},[1 2 3 4],[0 0 0 0]\n`;
    expect(await lineOfError(openColumnar([tableFile(text)]))).toContain(
      "Give polarizations and frequencies in the constants of a column map",
    );
  });
});

describe("A table without positions, phase centre, integration or weights", () => {
  it("is checked for what it can tell", async () => {
    const text = csvOf(gridSamples(5, 20, 4)).replaceAll(/,[^,\n]*$/gm, "");
    const dataset = await openColumnar([tableFile(text)]);
    expect(dataset.hasWeights).toBe(false);
    const check = await checkDataset(dataset, { plan: {}, rules: await loadRules([]) });
    const report = writeText(check, { width: 80, colour: false });
    expect(report).toContain("columnar tables");
    expect(report).not.toContain("NaN");
    expect(check.findings.filter(({ family }) => family === "geometry")).toEqual([]);
  });
});
