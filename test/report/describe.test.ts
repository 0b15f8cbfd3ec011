import { describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { card, real } from "../../src/dataset/fits/write.ts";
import { openDataset } from "../../src/dataset/open.ts";
import type { RowSummary } from "../../src/dataset/row-summary.ts";
import { describeText } from "../../src/report/describe.ts";
import { displayWidth } from "../../src/report/text/width.ts";
import {
  antennaTable,
  COMPLEX,
  DEC,
  fileMaker,
  freq,
  frequencyTable,
  type GroupFileSpec,
  groupFile,
  plainSpec,
  RA,
  sourceTable,
  stokes,
  subbands,
} from "../dataset/group-file.ts";

const file = fileMaker();

async function described(spec: Partial<GroupFileSpec> = {}, name = "night12.uvfits") {
  const dataset = await openDataset(file(groupFile(spec), name));
  return describeText(dataset, { summary: dataset.summary });
}

function expectWidth(text: string): void {
  for (const line of text.split("\n")) expect(displayWidth(line)).toBeLessThanOrEqual(80);
}

describe("describeText", () => {
  it("says what is in a dataset", async () => {
    expect((await described()).replace(/^\d+-/, "")).toBe(`night12
Format         random-groups FITS
Observed       Invented, 2024-06-15
Array          Ridge
               3 antennas; 2 baselines; geocentric positions
               diameter 25 m
Antennas       1 ANT1, 2 ANT2, 3 ANT3
Times          2024-06-15 06:00:00 to 2024-06-15 06:01:24 UTC (84.4 s)
               2 integration centres
               integration time not stated
Field          1 Field A: RA 08h14m00.00s Dec -30d15m00.0s (J2000), 4 rows
Frequencies    2 sub-bands of 3 channels
               0: 1.4 GHz to 1.402 GHz, channels 1 MHz wide
               1: 1.5 GHz to 1.502 GHz, channels 1 MHz wide
Polarizations  RR LL
Spacings       67 cm to 1.92 m across the sky
Size           20.2 kB on disk
               4 rows of 12 samples: 48 in all
               amplitudes in Jy, with weights
`);
  });

  it("says what is not known instead of guessing", async () => {
    const text = await described({
      axes: [COMPLEX, stokes(1)],
      cards: [],
      tables: [
        antennaTable({ cards: [card("FREQ", real(2.3e11))], numbers: [1, 2, 7], diameters: [25, 12, 0] }),
      ],
    });
    expect(text).toContain("4 antennas, 3 of them with data; 2 baselines");
    expect(text).toContain("(7 ANT7)");
    expect(text).toContain("in brackets: no data");
    expect(text).toContain("diameter 12 m to 25 m");
    expect(text).toContain("Dec unknown (equinox unknown)");
    expect(text).toContain("230 GHz, of unknown width\n");
    expect(text).toContain("uncalibrated amplitudes");
  });

  it("ends in the notes, faults marked", async () => {
    const text = await described({
      parameters: plainSpec.parameters.filter(({ name }) => !name.startsWith("WW")),
      tables: [frequencyTable()],
    });
    expect(text).toContain("every w is 0");
    expect(text).toContain(
      "\nNotes (!: the format allows it, science does not)\n! no parameter WW: w is taken as 0",
    );
    expect(text).toContain("\n- no antenna table (AN)");
  });

  it("fits 80 columns and stays short with many fields, sub-bands, setups and antennas", async () => {
    const numbers = Array.from({ length: 300 }, (_, i) => i + 1);
    const sources = numbers.map((id) => ({ id, name: `Field number ${id}`, ra: 10, dec: id / 10 }));
    const offsets = [numbers.slice(0, 40).map((i) => i * 1e6)];
    const text = await described({
      axes: [COMPLEX, stokes(4, -5), freq(2), subbands(40), RA, DEC],
      parameters: [
        ...plainSpec.parameters,
        { name: "SOURCE", stored: (row) => row + 1 },
        { name: "FREQSEL", stored: (row) => row + 1 },
        { name: "INTTIM", stored: (row) => row + 1 },
      ],
      stored: () => 1,
      tables: [
        antennaTable({ numbers, positions: numbers.map((n) => [6378000, n, 0] as const) }),
        frequencyTable({
          ids: numbers.slice(0, 30),
          offsets: Array(30).fill(offsets[0]),
          widths: Array(30).fill(Array(40).fill(1e6)),
          sidebands: Array(30).fill(Array(40).fill(1)),
        }),
        sourceTable(sources),
      ],
    });
    expectWidth(text);
    expect(text.split("\n").length).toBeLessThan(130);
    expect(text).toContain("and 280 more");
    expect(text).toContain("and 200 more");
    expect(text).toContain("and 14 more setups");
    expect(text).toContain("integration time 1 s to 4 s");
  });

  it("lets no name from the file reach the terminal as a command, nor break the layout", async () => {
    const hostile = `\u001b[31mred\u0007\u202e\nnext line ${"x".repeat(200)}`;
    const dataset = await openDataset(file(groupFile()));
    const evil: Dataset = {
      ...dataset,
      name: hostile,
      header: { telescope: hostile, observer: hostile, observed: hostile },
      unit: hostile,
      array: {
        ...dataset.array,
        name: hostile,
        antennas: dataset.array.antennas.map((a) => ({ ...a, name: hostile })),
      },
      fields: dataset.fields.map((field) => ({ ...field, name: hostile })),
      notes: [{ code: "x", kind: "note", text: hostile }],
    };
    const text = describeText(evil, { summary: dataset.summary });
    expect(text.replaceAll("\n", "")).not.toMatch(/[\p{Cc}\p{Cf}]/u);
    expect(text.split("\n").some((line) => line.startsWith("next line"))).toBe(false);
    expectWidth(text);
  });

  it("describes a dataset whose rows say nothing", async () => {
    const dataset = await openDataset(file(groupFile()));
    const summary: RowSummary = {
      ...dataset.summary,
      firstTime: Number.NaN,
      lastTime: Number.NaN,
      longestSpacing: Number.NaN,
      shortestSpacing: Number.NaN,
      rowsWithoutTime: 4,
      autocorrelations: 4,
      subarrays: [1, 2],
    };
    const text = describeText(dataset, { summary });
    expect(text).toContain("no time is finite");
    expect(text).toContain("4 rows without a time");
    expect(text).toContain("no baseline between different antennas");
    expect(text).toContain("4 autocorrelation rows");
    expect(text).toContain("sub-arrays 1, 2");
  });
});
