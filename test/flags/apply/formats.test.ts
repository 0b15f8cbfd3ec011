/** Flags set in copies of every other format: FITS-IDI, CSV, Parquet and Arrow, read back as the same selection in memory. */
import { readdirSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";
import { tableFromIPC } from "apache-arrow";
import { parquetReadObjects } from "hyparquet";
import { parquetWriteBuffer } from "hyparquet-writer";
import { describe, expect, it } from "vitest";
import { TextFlagger } from "../../../src/dataset/columnar/flagged-cell.ts";
import { flaggedView } from "../../../src/dataset/flagged-view.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { writeColumnar } from "../../../src/simulate/write-columnar.ts";
import { writeFitsIdi } from "../../../src/simulate/write-fits-idi.ts";
import { changed, rowsOf } from "../../dataset/joined/pieces.ts";
import { readAll } from "../../support/read-all.ts";
import { simulated } from "../../support/scenarios.ts";
import { copyOf, differences, flag, lineOfRejection, outputFolder } from "./copies.ts";

const folder = outputFolder();
let made = 0;
const path = (name: string) => join(folder, `${made++}-${name}`);

/** 36 baselines, a minute: 6 integrations of 16 channels and 2 products; some samples are flagged already. */
const { dataset: SKY } = simulated({ time: { start: "2026-03-01T12:00:00", duration: "1min" } });
const DATASET = changed(SKY, (block) => {
  const perRow = block.weight.length / block.time.length;
  for (let i = 0; i < block.rows * perRow; i++) {
    if ((block.firstRow * perRow + i) % 37 === 0) block.weight[i] = -Math.abs(block.weight[i]!);
  }
});
const times = Array.from((await readAll(DATASET, { want: "rows" })).time);
const [first, last] = [times[0]!, times.at(-1)!];
/** Whole channels of a product, so that one weight a product and sub-band can say it; and pieces of channels. */
const WHOLE = [
  flag({ antennas: [2], time: [first, (first + last) / 2] }),
  flag({ polarizations: [DATASET.polarizations[1]!], baselines: [[1, 5]] }, "F2"),
];
const PIECES = [...WHOLE, flag({ channels: [[3, 4]], antennas: [7] }, "F3")];
const { channels, polarizations } = DATASET.shape;

async function expectFlagged(to: string, from: string, flags: Parameters<typeof flaggedView>[1]) {
  const [got, expected] = [
    await readAll(await openDataset(to)),
    await readAll(flaggedView(await openDataset(from), flags)),
  ];
  expect(got.weight).toEqual(expected.weight);
  expect(got.real).toEqual(expected.real);
  expect(got.weight.filter((weight) => weight <= 0).length).toBeGreaterThan(100);
}

describe("FITS-IDI", () => {
  it("gets a FLAG table of its own at the end, and keeps every byte before it", async () => {
    const from = path("a.idifits");
    await writeFitsIdi(DATASET, from);
    const to = path("b.idifits");
    const { before, after, into, tableRows } = await copyOf(from, to, PIECES);
    expect([into, tableRows]).toEqual(["flag-table", 3]);
    expect(after.subarray(0, before.length).equals(before)).toBe(true);
    await expectFlagged(to, from, PIECES);
    // Once more: beside the table that is there now.
    const again = path("c.idifits");
    const more = flag({ antennas: [9] }, "F4");
    const second = await copyOf(to, again, [more]);
    expect(second.after.toString("latin1", after.length)).toMatch(/EXTVER {2}= +2/);
    await expectFlagged(again, from, [...PIECES, more]);
  });

  it("holds whole channels in a weight for all channels, and changes the sign bits alone", async () => {
    const from = path("a.idifits");
    const even = changed(SKY, (block) => block.weight.fill(2));
    await writeFitsIdi(even, from);
    const to = path("b.idifits");
    const { before, after, counts, into } = await copyOf(from, to, WHOLE, { into: "weights" });
    expect(into).toBe("weights");
    expect(differences(before, after)).toHaveLength(counts.union.unflagged / channels);
    await expectFlagged(to, from, WHOLE);
    expect(await lineOfRejection(copyOf(from, path("c.idifits"), PIECES, { into: "weights" }))).toMatch(
      /the weights cannot hold these flags: one weight stands for all channels of a sub-band and product, and the flags take 2 of its \d+ samples\. Use --into flag-table/,
    );
  });

  it("holds any selection in the weights of a matrix that has them", async () => {
    const from = path("a.idifits");
    await writeFitsIdi(DATASET, from);
    const to = path("b.idifits");
    const { before, after, counts } = await copyOf(from, to, PIECES, { into: "weights" });
    expect(differences(before, after)).toHaveLength(counts.union.unflagged);
    await expectFlagged(to, from, PIECES);
  });
});

describe("tables of columns", () => {
  it.each([
    ["csv", "sample", "flag-column"],
    ["tsv", "row", "flag-column"],
    ["tsv", "row", "weights"],
    ["parquet", "sample", "flag-column"],
    ["parquet", "row", "flag-column"],
    ["parquet", "row", "weights"],
    ["arrow", "sample", "weights"],
    ["arrow", "sample", "flag-column"],
    ["arrow", "row", "flag-column"],
  ] as const)("hold the flags: %s, a row a %s, in the %s", async (suffix, layout, place) => {
    const from = path(`a.${suffix}`);
    // Without weights the table has a column of flags.
    await writeColumnar({ ...DATASET, hasWeights: place === "weights" }, from, { layout });
    const to = path(`b.${suffix}`);
    const { into, paths } = await copyOf(from, to, PIECES);
    expect(into).toBe(place);
    expect(paths).toEqual([to, `${to}.columns.yaml`]);
    await expectFlagged(to, from, PIECES);
  });

  it("of text keep every line but for the cells of flags", async () => {
    const from = path("a.csv");
    await writeColumnar({ ...DATASET, hasWeights: false }, from, { layout: "sample" });
    const to = path("b.csv");
    const { before, after, counts } = await copyOf(from, to, PIECES);
    const [was, is] = [before, after].map((bytes) => bytes.toString("utf8").split("\n"));
    const at = was![0]!.split(",").indexOf("flag");
    let edited = 0;
    for (const [i, line] of was!.entries()) {
      const cells = line.split(",");
      if (is![i] === line) continue;
      edited += 1;
      cells[at] = "1";
      expect(is![i]).toBe(cells.join(","));
    }
    expect(edited).toBe(counts.union.unflagged);
  });

  it("of several files go into a folder, with the map of their columns", async () => {
    const half = DATASET.rows / 2;
    const parts = [path("part.csv"), path("part.csv")];
    await writeColumnar(rowsOf(DATASET, 0, half), parts[0]!);
    await writeColumnar(rowsOf(DATASET, half, DATASET.rows), parts[1]!);
    const { applyFlags } = await import("../../../src/flags/apply/apply.ts");
    const out = path("parts");
    const dataset = await openDataset(parts);
    await applyFlags({ dataset, flags: PIECES, out });
    expect(readdirSync(out)).toHaveLength(3);
    const copies = readdirSync(out).filter((name) => name.endsWith(".csv"));
    const got = await readAll(await openDataset(copies.map((name) => join(out, name))));
    expect(got.weight).toEqual((await readAll(flaggedView(dataset, PIECES))).weight);
  });

  const HAND = [
    "# made by hand",
    'time,antenna1,antenna2,u_m,v_m,w_m,polarization,frequency,real,imag,weight,note,"flagged"',
    "",
    '61000.5,1,2,10,20,0,XX,1400000000,1,0,2.50,"said ""so"", twice",False',
    "61000.5,1,2,10,20,0,YY,1400000000,1,0,2.50,,",
    '61000.5,1,3,10,20,0,XX,1400000000,1,0,+.5e1,"over',
    'two lines","False"',
    "61000.5,1,3,10,20,0,YY,1400000000,1,0,-2,x,True",
  ];

  it.each(["\n", "\r\n"])(
    "of text written by hand keep quotes, comments, empty lines and line ends",
    async (end) => {
      const from = path("hand.csv");
      const text = `\ufeff${HAND.join(end)}`;
      writeFileSync(from, text);
      const to = path("copy.csv");
      const { after } = await copyOf(from, to, [flag({ antennas: [3, 2] })]);
      const expected = text
        .replace('twice",False', 'twice",True')
        .replace(`2.50,,${end}`, `2.50,,True${end}`)
        .replace('"False"', '"True"');
      expect(after.toString("utf8")).toBe(expected);
    },
  );

  it("without a column of flags change the sign of the weights, their digits kept", async () => {
    const from = path("hand.csv");
    writeFileSync(
      from,
      HAND.join("\n")
        .replace(',"flagged"', "")
        .replace(/,("?)(False|True|)\1(?=\n61|$)/g, "")
        .replace(/,"False"$/m, ""),
    );
    const to = path("copy.csv");
    const { after, into, insteadOf } = await copyOf(from, to, [flag({ antennas: [3] })]);
    expect([into, insteadOf?.why]).toEqual(["weights", "no column of the table holds flags"]);
    expect(after.toString("utf8")).toBe(readFileSync(from, "utf8").replace("+.5e1", "-.5e1"));
  });

  it("are packed where the name says so", async () => {
    const from = path("hand.csv");
    writeFileSync(from, HAND.join("\n"));
    const [plain, packed] = [path("copy.csv"), path("copy.csv.gz")];
    const flags = [flag({ antennas: [3] })];
    await copyOf(from, plain, flags);
    await copyOf(from, packed, flags);
    expect(gunzipSync(readFileSync(packed)).equals(readFileSync(plain))).toBe(true);
  });

  it("with no place for flags are refused with what to add", async () => {
    const from = path("bare.csv");
    writeFileSync(
      from,
      "time,antenna1,antenna2,u_m,v_m,w_m,polarization,frequency,real,imag\n61000,1,2,1,2,0,XX,1e9,1,0\n",
    );
    expect(await lineOfRejection(copyOf(from, path("copy.csv"), [flag({})]))).toMatch(
      /no column of the table holds flags or weights\. Add a column of flags, all 0, to the table/,
    );
  });

  it("of Parquet keep columns that nobody asked about, cell by cell", async () => {
    const from = path("more.parquet");
    const rows = 6;
    const each = <T>(value: (i: number) => T) => Array.from({ length: rows }, (_, i) => value(i));
    writeFileSync(
      from,
      new Uint8Array(
        parquetWriteBuffer({
          columnData: [
            { name: "time", data: each((i) => 61000 + i), type: "DOUBLE" },
            { name: "antenna1", data: each(() => 1), type: "INT32" },
            { name: "antenna2", data: each((i) => 2 + (i % 2)), type: "INT32" },
            ...["u_m", "v_m", "w_m"].map((name) => ({
              name,
              data: each((i) => i + 1),
              type: "DOUBLE" as const,
            })),
            { name: "frequency", data: each(() => 1.4e9), type: "DOUBLE" },
            { name: "polarization", data: each(() => "XX"), type: "STRING" },
            { name: "real", data: each(() => 1), type: "FLOAT" },
            { name: "imag", data: each((i) => i / 4), type: "FLOAT" },
            { name: "flag", data: each((i) => (i === 0 ? null : false)), type: "BOOLEAN" },
            { name: "operator", data: each((i) => (i === 3 ? null : `night ${i}`)), type: "STRING" },
            { name: "taken", data: each((i) => new Date(1e12 + i)), type: "TIMESTAMP" },
            { name: "serial", data: each((i) => 2n ** 60n + BigInt(i)), type: "INT64" },
          ],
          rowGroupSize: 4,
          kvMetadata: [{ key: "origin", value: "a test" }],
        }),
      ),
    );
    const to = path("copy.parquet");
    const { before, after } = await copyOf(from, to, [flag({ antennas: [2] })]);
    const cells = (bytes: Buffer) =>
      parquetReadObjects({
        file: bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.length) as ArrayBuffer,
      });
    const [was, is] = [await cells(before), await cells(after)];
    expect(is).toEqual(was.map((row, i) => (i % 2 === 0 ? { ...row, flag: true } : row)));
  });

  it("of Arrow keep columns that nobody asked about, cell by cell", async () => {
    const from = path("a.arrow");
    await writeColumnar({ ...DATASET, hasWeights: false }, from, { layout: "sample", blockRows: 50 });
    const to = path("b.arrow");
    const { before, after } = await copyOf(from, to, PIECES);
    const [was, is] = [tableFromIPC(before), tableFromIPC(after)];
    expect(is.schema.metadata).toEqual(was.schema.metadata);
    expect(is.batches.map(({ numRows }) => numRows)).toEqual(was.batches.map(({ numRows }) => numRows));
    for (const { name, type } of was.schema.fields) {
      expect(String(is.getChild(name)!.type)).toBe(String(type));
      if (name !== "flag") expect(is.getChild(name)!.toArray()).toEqual(was.getChild(name)!.toArray());
    }
    expect(polarizations).toBe(2);
  });
});

describe("the text of a cell", () => {
  const edit = (way: "flag" | "sign", text: string, ...taken: number[]) =>
    new TextFlagger(way).edit(text, Uint8Array.from(taken));

  it("says yes as the column does", () => {
    expect(["0", " false", "no ", "F", "0.0", "1", "TRUE", ""].map((text) => edit("flag", text, 1))).toEqual([
      "1",
      " true",
      "yes ",
      "T",
      "1.0",
      "1",
      "TRUE",
      "1",
    ]);
    const flagger = new TextFlagger("flag");
    flagger.edit("No", Uint8Array.of(0));
    expect(flagger.edit("", Uint8Array.of(1))).toBe("Yes");
  });

  it("changes the elements of a list alone, or makes a list of one word for all", () => {
    expect(edit("flag", "[0, 0  1;0]", 0, 1, 0, 1)).toBe("[0, 1  1;1]");
    expect(edit("flag", "false", 0, 1, 0)).toBe("[false true false]");
    expect(edit("flag", "", 0, 1)).toBe("[0 1]");
    expect(edit("sign", "2.5", 1, 0)).toBe("[-2.5 2.5]");
    expect(edit("flag", "0", 1, 1)).toBe("1");
  });

  it("makes positive numbers negative, their digits kept", () => {
    expect(["2.50", "+1e-3", "-4", "0", "nan", "", " 7 "].map((text) => edit("sign", text, 1))).toEqual([
      "-2.50",
      "-1e-3",
      "-4",
      "0",
      "nan",
      "",
      " -7 ",
    ]);
  });
});
