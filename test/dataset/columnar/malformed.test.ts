import { readFileSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { gzipSync } from "node:zlib";
import { afterAll, describe, expect, it } from "vitest";
import { looksColumnar, openColumnar } from "../../../src/dataset/columnar/open.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { readAll } from "../../support/read-all.ts";
import { lineOfError } from "../read-all.ts";
import { csvOf, folder, gridSamples, HEADER, tableFile } from "./table-text.ts";

afterAll(() => rmSync(folder, { recursive: true, force: true }));

const ROW = "60000,1,2,1,2,3,0,1400,XX,1,2,3";

describe("A table of text that is malformed", () => {
  it.each([
    [
      "text among numbers",
      `${ROW}\n${ROW.replace(",2,3,0,", ",two,3,0,")}`,
      'row 2: "two" in column "v_m" is not a number',
    ],
    ["an antenna left empty", ROW.replace(",1,2,", ",,2,"), 'row 1: there is nothing in column "ant1"'],
    ["no such polarization", ROW.replace("XX", "XZ"), 'column "pol" holds "XZ", which is no polarization'],
    [
      "a row that is too short",
      `${ROW}\n60000,1,2`,
      "line 3: the record has 3 fields, unlike the line of names",
    ],
    ["a quote that is never closed", `${ROW}\n"60000,1,2`, "a quote is not closed before the file ends"],
    ["no rows", "", "the table has no rows"],
    ["no frequency", ROW.replace("1400", ""), 'there is no frequency in column "freq_MHz"'],
  ])("names where: %s", async (_, rows, message) => {
    expect(await lineOfError(openColumnar([tableFile(`${HEADER}\n${rows}\n`)]))).toContain(message);
  });

  it("with a date that is none is told", async () => {
    const text = `${HEADER.replace("mjd", "utc")}\n${ROW.replace("60000", "2026-13-01")}\n`;
    expect(await lineOfError(openColumnar([tableFile(text)]))).toContain(
      '"2026-13-01" in column "utc" is no date',
    );
  });

  it("without a line of names is told", async () => {
    const line = await lineOfError(openColumnar([tableFile(`${ROW.replace("XX", "1")}\n`)]));
    expect(line).toContain("the first line holds numbers: expected the names of the columns");
  });

  it("with two columns of one name is told", async () => {
    const line = await lineOfError(openColumnar([tableFile(`${HEADER},imag\n${ROW},1\n`)]));
    expect(line).toContain('two columns are called "imag"');
  });

  it("with a line that never ends is given up after 16 MB, not held", async () => {
    const path = join(folder, "endless.csv");
    writeFileSync(path, `${HEADER}\n"${"x".repeat(40e6)}`);
    const before = process.memoryUsage().arrayBuffers;
    const line = await lineOfError(openColumnar([path]));
    expect(line).toContain("a record is longer than 16777216 bytes");
    expect(process.memoryUsage().arrayBuffers - before).toBeLessThan(64e6);
  });

  it("with sub-bands and channels without end is refused before they are held", async () => {
    const rows = Array.from({ length: 4200 }, (_, i) =>
      ROW.replace("60000,", `60000,${i % 4090},`).replace(",0,1400,", `,${i},1400,`),
    );
    const header = HEADER.replace("mjd,", "mjd,subband,");
    expect(await lineOfError(openColumnar([tableFile(`${header}\n${rows.join("\n")}\n`)]))).toContain(
      "there would be 1 x 4090 x 4200 channels in all setups and sub-bands",
    );
  });

  it("with a million columns is refused", async () => {
    const names = Array.from({ length: 1e6 }, (_, i) => `c${i}`).join(",");
    expect(await lineOfError(openColumnar([tableFile(`${names}\n`)]))).toContain(
      "columns or more: expected at most 4096",
    );
  });

  it("with more different polarizations or antennas than there can be stops there", async () => {
    const rows = Array.from({ length: 70_000 }, (_, i) => ROW.replace(",1,2,", `,${i},${i + 1},`)).join("\n");
    expect(await lineOfError(openColumnar([tableFile(`${HEADER}\n${rows}\n`)]))).toContain(
      'column "ant1" names more than 65536 antennas',
    );
  });
});

describe("What a table of text may be", () => {
  const samples = gridSamples(3, 2, 2);
  it.each([
    ["semicolons", csvOf(samples).replaceAll(",", ";"), ".csv"],
    ["tabs", csvOf(samples).replaceAll(",", "\t"), ".tsv"],
    ["CRLF and a byte order mark", `\ufeff${csvOf(samples).replaceAll("\n", "\r\n")}`, ".csv"],
    ["comments and empty lines", `# made up\n${csvOf(samples).replaceAll("\n", "\n\n")}`, ".csv"],
    ["quoted cells", csvOf(samples).replaceAll(/([^,\n]+)/g, '"$1"'), ".csv"],
  ])("with %s", async (_, text, suffix) => {
    const dataset = await openColumnar([tableFile(text, { suffix })]);
    expect([...(await readAll(dataset)).real]).toEqual(samples.map(({ re }) => re));
  });

  it("packed with gzip", async () => {
    const path = join(folder, "packed.csv.gz");
    writeFileSync(path, gzipSync(csvOf(samples)));
    const dataset = await openDataset(path);
    expect(dataset.name).toBe("packed");
    expect([...(await readAll(dataset)).real]).toEqual(samples.map(({ re }) => re));
  });
});

describe("A binary table that is damaged", () => {
  it.each(["parquet", "arrow"])("is named, wherever it is cut: %s", async (suffix) => {
    const whole = readFileSync(`sample-inputs/formats.${suffix}`);
    for (const share of [0.001, 0.3, 0.7, 0.999]) {
      const path = join(folder, `cut-${share}.${suffix}`);
      writeFileSync(path, whole.subarray(0, Math.floor(whole.length * share)));
      const line = await lineOfError(openColumnar([path]));
      expect(line).toContain(`cut-${share}.${suffix}`);
      expect(line).toMatch(/footer|damaged|no table/);
    }
  });

  it("is named when bytes in its middle are changed", async () => {
    const whole = Uint8Array.from(readFileSync("sample-inputs/formats.parquet"));
    whole.fill(0xff, 20_000, 30_000);
    const path = join(folder, "changed.parquet");
    writeFileSync(path, whole);
    expect(await lineOfError(openColumnar([path]))).toContain("the Parquet file is damaged");
  });
});

describe("What looks like a table", () => {
  const looks = (text: string) => looksColumnar(Buffer.from(text), "x");
  it("is told by its first bytes", () => {
    expect(looks("PAR1....")).toBe(true);
    expect(looks("ARROW1\0\0")).toBe(true);
    expect(looksColumnar(Uint8Array.of(255, 255, 255, 255, 64, 1, 0, 0, 16), "x")).toBe(true);
    expect(looks(`${HEADER}\n${ROW}\n`)).toBe(true);
  });
  it("is not FITS, YAML, prose or bytes", () => {
    expect(looks("SIMPLE  =                    T / , , , , , , ,")).toBe(false);
    expect(looks("columns:\n  time: mjd\n")).toBe(false);
    expect(looks("")).toBe(false);
    expect(looks("a,b,c,d,e,f,g\u0000")).toBe(false);
  });
});

describe("A dataset without positions, phase centre, integration and weights", () => {
  it("opens, and says what cannot be judged", async () => {
    const dataset = await openDataset(tableFile(csvOf(gridSamples(4, 3, 2))));
    const codes = dataset.notes.map(({ code }) => code);
    expect(codes).toContain("missing-antenna-positions");
    expect(codes).toContain("missing-phase-centre");
    expect(dataset.array).toMatchObject({ frame: "unknown", fromTable: false });
    expect((await readAll(dataset)).integration[0]).toBeNaN();
  });
});
