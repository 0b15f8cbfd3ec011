import { existsSync, readdirSync, readFileSync } from "node:fs";
import { basename, dirname, join } from "node:path";
import { describe, expect, it } from "vitest";
import {
  bigEndian,
  binaryTable,
  card,
  dataPadding,
  FitsFileWriter,
  groupsBytes,
  groupsHeader,
  headerBlocks,
  padding,
  real,
  streamedTable,
} from "../../../src/dataset/fits/write.ts";
import { fileMaker, plainSpec } from "../group-file.ts";
import { lineOfError } from "../read-all.ts";

const file = fileMaker();
const firstCards = (bytes: Uint8Array, count: number) =>
  Array.from({ length: count }, (_, i) =>
    Buffer.from(bytes)
      .toString("latin1", i * 80, i * 80 + 80)
      .trimEnd(),
  );

describe("headerBlocks", () => {
  it("writes fixed format where a value fits it", () => {
    const bytes = headerBlocks([
      card("SIMPLE", true, "conforms"),
      card("BITPIX", -32),
      card("CRVAL4", real(1.420014e9)),
      card("PSCAL1", real(7.04218409114e-10)),
      card("OBJECT", "It's"),
      { keyword: "HISTORY", comment: "made for a test" },
    ]);
    expect(bytes).toHaveLength(2880);
    expect(firstCards(bytes, 7)).toEqual([
      "SIMPLE  =                    T / conforms",
      "BITPIX  =                  -32",
      "CRVAL4  =         1420014000.0",
      "PSCAL1  =    7.04218409114E-10",
      "OBJECT  = 'It''s   '",
      "HISTORY made for a test",
      "END",
    ]);
  });

  it("fills whole blocks at 36 cards and the first beyond", () => {
    const cards = (n: number) => Array.from({ length: n }, (_, i) => card(`K${i}`, i));
    expect(headerBlocks(cards(35))).toHaveLength(2880);
    expect(headerBlocks(cards(36))).toHaveLength(5760);
  });

  it("puts ? for what FITS cannot hold", () => {
    expect(firstCards(headerBlocks([card("OBJECT", "Plätz\n天")]), 1)[0]).toBe("OBJECT  = 'Pl?tz?? '");
  });

  it("does not tear a doubled quote apart at the end of a card", () => {
    for (let shift = 0; shift < 4; shift++) {
      const text = `${"x".repeat(shift)}${"'".repeat(120)}`;
      const lines = firstCards(headerBlocks([card("A", text)]), 8).filter((line) =>
        /^A|^CONTINUE/.test(line),
      );
      const joined = lines
        .map((line) => /'(.*)'$/.exec(line)![1]!.replace(/&$/, "").replaceAll("''", "'"))
        .join("");
      expect(joined).toBe(text);
    }
  });

  it("refuses what is no keyword, no whole number, no finite number", () => {
    expect(() => headerBlocks([card("too long a word", 1)])).toThrow(RangeError);
    expect(() => headerBlocks([card("A", 1.5)])).toThrow("expected a whole number");
    expect(() => headerBlocks([card("A", real(Number.NaN))])).toThrow("finite");
  });
});

describe("groupsHeader", () => {
  // FITS Standard 4.0, section 6.1.1: the mandatory keywords in their order.
  it("begins with the mandatory keywords in order", () => {
    const keywords = firstCards(groupsHeader({ ...plainSpec, groups: 4 }), 13).map((line) =>
      line.slice(0, 8).trim(),
    );
    expect(keywords.slice(0, 10)).toEqual([
      "SIMPLE",
      "BITPIX",
      "NAXIS",
      "NAXIS1",
      "NAXIS2",
      "NAXIS3",
      "NAXIS4",
      "NAXIS5",
      "NAXIS6",
      "NAXIS7",
    ]);
    expect(keywords.slice(10)).toEqual(["EXTEND", "GROUPS", "PCOUNT"]);
  });

  it("leaves out CTYPE of an unnamed axis", () => {
    const axes = [...plainSpec.axes.slice(0, 3), { type: "", length: 1, value: 0, step: 0 }];
    const text = Buffer.from(groupsHeader({ ...plainSpec, axes, groups: 4 })).toString("latin1");
    expect(text).toContain("CTYPE4");
    expect(text).not.toContain("CTYPE5");
    expect(text).toContain("CRVAL5");
  });
});

describe("sizes", () => {
  it("counts bytes as FITS Standard 4.0, eq. 4", () => {
    expect(groupsBytes({ ...plainSpec, groups: 4 })).toBe(4 * 4 * (6 + 3 * 2 * 3 * 2));
    expect([padding(0), padding(1), padding(2880), padding(542472)]).toEqual([0, 2879, 0, 544320 - 542472]);
    expect(dataPadding(542472)).toEqual(new Uint8Array(1848));
  });

  it("refuses to write swapped bytes into a place of another size", () => {
    expect(() => bigEndian(Float32Array.of(1), new Uint8Array(3))).toThrow("out holds 3 bytes, expected 4");
  });
});

describe("binaryTable", () => {
  it("refuses cells that do not fit their form", () => {
    const table = (form: string, cell: string | number[]) => () =>
      binaryTable({ name: "T", columns: [{ name: "A", form, cells: [cell] }] });
    expect(table("3A", "four")).toThrow('column A: "four" is longer than 3');
    expect(table("3J", [1, 2])).toThrow("column A: a cell holds 2 values, expected 3");
    expect(table("1Z", [1])).toThrow('form "1Z" is unknown');
    expect(() =>
      binaryTable({
        name: "T",
        columns: [
          { name: "A", form: "1J", cells: [1] },
          { name: "B", form: "1J", cells: [] },
        ],
      }),
    ).toThrow("column B holds 0 rows, expected 1");
  });
});

describe("streamedTable", () => {
  const columns = [
    { name: "TIME", form: "1D", unit: "DAYS" },
    { name: "FLUX", form: "3E", keywords: { TSCAL: real(2) } },
    { name: "NONE", form: "0D" },
  ];

  it("has the header of a table that is built in memory, and the bytes of its rows", () => {
    const cards = [card("NO_BAND", 2)];
    const { header, rowBytes } = streamedTable({ name: "UV_DATA", rows: 2, cards, columns });
    const cells = [
      [1, 2],
      [
        [1, 2, 3],
        [4, 5, 6],
      ],
      [[], []],
    ];
    const built = binaryTable({
      name: "UV_DATA",
      cards,
      columns: columns.map((column, i) => ({ ...column, cells: cells[i]! })),
    });
    expect(rowBytes).toBe(8 + 12);
    expect(Buffer.from(built).subarray(0, header.length).equals(header)).toBe(true);
    expect(built.length).toBe(header.length + 2880);
  });

  it("refuses columns whose width goes by the row", () => {
    const variable = [{ name: "LIST", form: "1PE" }];
    expect(() => streamedTable({ name: "X", rows: 1, columns: variable })).toThrow("has no fixed width");
  });
});

describe("FitsFileWriter", () => {
  const header = headerBlocks([card("SIMPLE", true)]);

  it("pads each data unit and gives the file its name at the end", async () => {
    const path = join(dirname(file(Buffer.from("x"))), "written.fits");
    const writer = await FitsFileWriter.create(path);
    await writer.blocks(header);
    await writer.data(Buffer.from("abc"));
    await writer.data(Buffer.from("de"));
    await writer.blocks(header);
    expect(existsSync(path)).toBe(false);
    await writer.commit();
    const bytes = readFileSync(path);
    expect(bytes).toHaveLength(3 * 2880);
    expect(bytes.toString("latin1", 2880, 2886)).toBe("abcde\0");
    expect(readdirSync(dirname(path)).filter((name) => name.includes("partial"))).toEqual([]);
  });

  it("refuses to replace a file unless it is told to", async () => {
    const path = file(Buffer.from("mine"));
    expect(await lineOfError(FitsFileWriter.create(path))).toBe(
      `${path}: the file exists already. Choose another name or move it away`,
    );
    const writer = await FitsFileWriter.create(path, { overwrite: true });
    await writer.blocks(header);
    await writer.commit();
    expect(readFileSync(path)).toHaveLength(2880);
  });

  it("leaves nothing behind when it is given up", async () => {
    const path = join(dirname(file(Buffer.from("x"))), "given-up.fits");
    const writer = await FitsFileWriter.create(path);
    await writer.blocks(header);
    await writer.abort();
    expect(readdirSync(dirname(path)).some((name) => name.startsWith(basename(path)))).toBe(false);
  });

  it("says so when the folder is not there", async () => {
    const path = join(dirname(file(Buffer.from("x"))), "no", "such", "folder.fits");
    expect(await lineOfError(FitsFileWriter.create(path))).toContain("the file cannot be written (ENOENT)");
  });
});
