import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { openFits } from "../../../src/dataset/fits/hdus.ts";
import { findColumn, requireColumn, tableLayout } from "../../../src/dataset/fits/table-layout.ts";
import { readTable, type Table } from "../../../src/dataset/fits/table-rows.ts";
import {
  binaryTable,
  type ColumnToWrite,
  card,
  headerBlocks,
  real,
} from "../../../src/dataset/fits/write.ts";
import { lineOfError } from "../read-all.ts";
import { everyColumn } from "./every-column.ts";
import { memoryCursor, memorySource } from "./memory-cursor.ts";

const primary = headerBlocks([card("SIMPLE", true), card("BITPIX", 8), card("NAXIS", 0)]);

async function tableOf(bytes: Uint8Array, mostBytes?: number): Promise<Table> {
  const file = Buffer.concat([primary, bytes]);
  const { hdus } = await openFits(memorySource(file));
  return readTable(memoryCursor(file), tableLayout(hdus[1]!), mostBytes);
}

const made = (columns: readonly ColumnToWrite[]) => tableOf(binaryTable({ name: "T", columns }));

/** Put other text over the first card of a keyword. */
function withCard(bytes: Uint8Array, keyword: string, value: string): Buffer {
  const changed = Buffer.from(bytes);
  for (let at = 0; at < changed.length; at += 80) {
    if (changed.toString("latin1", at, at + 8) !== keyword.padEnd(8)) continue;
    changed.write(`${keyword.padEnd(8)}= ${value}`.padEnd(80), at, "latin1");
    return changed;
  }
  throw new Error(`no ${keyword}`);
}

// FITS Standard 4.0, table 18: the column types.
describe("a table with a column of every type", () => {
  it("gives every number as it was written", async () => {
    const table = await made(everyColumn);
    const numbers = (name: string, row: number) => [...table.numbers(row, findColumn(table.layout, name)!)];
    expect(numbers("B", 0).concat(numbers("B", 1))).toEqual([0, 255]);
    expect(numbers("I", 0)).toEqual([-32768, 32767]);
    expect(numbers("J", 0).concat(numbers("J", 1))).toEqual([-2147483648, 2147483647]);
    expect(numbers("E", 0).concat(numbers("E", 1))).toEqual([1.5, Number.NaN]);
    expect(numbers("D", 0)).toEqual([1e300, -0.1, Number.NEGATIVE_INFINITY]);
    expect(numbers("C", 0)).toEqual([1.5, -2.5]);
    expect(numbers("M", 1)).toEqual([0.3, 0.4]);
    expect(numbers("P", 0)).toEqual([1, 2, 3]);
    expect(numbers("P", 1)).toEqual([]);
    expect(numbers("Q", 1)).toEqual([8, 9]);
    expect(numbers("ZERO", 0)).toEqual([]);
    expect(numbers("LAST", 1)).toEqual([12]);
  });

  it("keeps every digit of 64-bit integers", async () => {
    const table = await made(everyColumn);
    const column = findColumn(table.layout, "K")!;
    expect(table.integers(0, column)).toEqual([-9007199254740993n]);
    expect(table.integers(1, column)).toEqual([9223372036854775807n]);
  });

  it("gives text, logicals and bits as what they are", async () => {
    const table = await made(everyColumn);
    const column = (name: string) => findColumn(table.layout, name)!;
    expect(table.text(0, column("A"))).toBe("Ridge");
    expect(table.text(1, column("A"))).toBe("");
    expect(table.logicals(0, column("L"))).toEqual([true, false, null]);
    expect(table.bits(0, column("X"))).toEqual([1, 0, 0, 0, 0, 0, 0, 1, 0, 1, 1].map(Boolean));
    expect(table.number(0, column("A"))).toBeNaN();
    expect(table.text(0, column("J"))).toBe("");
  });

  it("gives NaN for an element that a cell does not have", async () => {
    const table = await made(everyColumn);
    expect(table.number(0, findColumn(table.layout, "ZERO")!)).toBeNaN();
    expect(table.number(1, findColumn(table.layout, "P")!, 0)).toBeNaN();
    expect(table.number(0, findColumn(table.layout, "I")!, 1)).toBe(32767);
  });
});

describe("scaling", () => {
  it("applies TSCAL and TZERO, and takes TNULL for undefined", async () => {
    const table = await made([
      { name: "S", form: "1I", cells: [10, -5], keywords: { TSCAL: real(0.5), TZERO: real(100), TNULL: -5 } },
      // The convention for unsigned integers (section 5.2.5).
      { name: "U", form: "1J", cells: [-2147483648, 2147483647], keywords: { TZERO: real(2147483648) } },
      { name: "N", form: "1K", cells: [-1n, 5n], keywords: { TNULL: -1 } },
      {
        name: "C",
        form: "1C",
        cells: [
          [1, 1],
          [2, 2],
        ],
        keywords: { TSCAL: real(2), TZERO: real(10) },
      },
    ]);
    const column = (name: string) => findColumn(table.layout, name)!;
    expect([table.number(0, column("S")), table.number(1, column("S"))]).toEqual([105, Number.NaN]);
    expect([...table.numbers(1, column("U")), ...table.integers(0, column("U"))]).toEqual([4294967295, 0n]);
    expect([table.number(0, column("N")), table.number(1, column("N"))]).toEqual([Number.NaN, 5]);
    expect([...table.numbers(1, column("C"))]).toEqual([14, 4]);
    expect(() => table.integers(0, column("S"))).toThrow("does not hold whole numbers");
  });
});

describe("names and shapes", () => {
  it("finds columns without regard to case and padding, by the first name that is there", async () => {
    const table = await made([
      { name: "ID. NO.", form: "1J", cells: [4] },
      { name: "Ra Epo ", form: "1D", cells: [5] },
    ]);
    expect(findColumn(table.layout, "SOURCE_ID", "id. no.")?.index).toBe(1);
    expect(findColumn(table.layout, "RA EPO")?.index).toBe(2);
    expect(() => requireColumn(table.layout, "ID.NO.")).toThrow(
      'no column ID.NO. (is it the one called "ID. NO."?)',
    );
  });

  it("reads TDIM, and passes over one that makes no sense", async () => {
    const cells = [[1, 2, 3, 4, 5, 6]];
    const table = await made([
      { name: "A", form: "6J", cells, keywords: { TDIM: "(3,2)" } },
      { name: "B", form: "6J", cells, keywords: { TDIM: "(3,3)" } },
      { name: "C", form: "6J", cells, keywords: { TDIM: "(3;2" } },
    ]);
    expect(table.layout.columns.map(({ shape }) => shape)).toEqual([[3, 2], [6], [6]]);
  });

  it("stops text at a NUL", async () => {
    const bytes = binaryTable({ name: "T", columns: [{ name: "A", form: "8A", cells: ["Rid~ge"] }] });
    const at = Buffer.from(bytes).lastIndexOf("~");
    bytes[at] = 0;
    const table = await tableOf(bytes);
    expect(table.text(0, table.layout.columns[0]!)).toBe("Rid");
  });
});

describe("malformed tables", () => {
  const good = binaryTable({
    name: "T",
    columns: [
      { name: "A", form: "1J", cells: [1, 2] },
      { name: "V", form: "1PE", cells: [[1, 2], [3]] },
    ],
  });

  it.each([
    ["TFORM1", "'1Z      '", "TFORM1 is 1Z: expected a repeat count and one of L X B I J K A E D C M P Q"],
    ["TFORM1", "'99999999999999999999J'", "expected a cell that a file can hold"],
    ["TFORM1", "'2J      '", "the 2 columns take 16 bytes a row, NAXIS1 says 12: expected the same"],
    ["TFORM2", "'3PE     '", "TFORM2 is 3PE: expected at most one array a cell"],
    ["TFIELDS", "                 999", "TFORM3 is missing"],
    ["TFIELDS", "                1000", "TFIELDS is 1000: expected a whole number from 0 to 999"],
    ["TFIELDS", "                  -1", "TFIELDS is -1: expected a whole number from 0 to 999"],
    ["TFORM1", "                   1", "TFORM1 is 1: expected a string in quotes"],
  ])("refuses %s = %s", async (keyword, value, message) => {
    const line = await lineOfError(tableOf(withCard(good, keyword, value)));
    expect(line).toContain("made.fits, HDU 2 (T)");
    expect(line).toContain(message);
  });

  it("refuses a heap that starts inside the rows", async () => {
    const bytes = binaryTable({
      name: "T",
      cards: [card("THEAP", 3)],
      columns: [{ name: "A", form: "1J", cells: [1] }],
    });
    expect(await lineOfError(tableOf(bytes))).toContain(
      "THEAP is 3: expected the heap between byte 4 of the data, where the rows end, and their end at 4",
    );
  });

  it("reads a heap behind a gap", async () => {
    // One row of one descriptor (2 elements at 0), 4 bytes of gap, then two float32.
    const header = headerBlocks([
      card("XTENSION", "BINTABLE"),
      card("BITPIX", 8),
      card("NAXIS", 2),
      card("NAXIS1", 8),
      card("NAXIS2", 1),
      card("PCOUNT", 12),
      card("GCOUNT", 1),
      card("TFIELDS", 1),
      card("THEAP", 12),
      card("TFORM1", "1PE(2)"),
    ]);
    const data = Buffer.alloc(2880);
    data.writeInt32BE(2, 0);
    data.writeFloatBE(1.5, 12);
    data.writeFloatBE(-2.5, 16);
    const table = await tableOf(Buffer.concat([header, data]));
    expect([...table.numbers(0, table.layout.columns[0]!)]).toEqual([1.5, -2.5]);
  });

  it.each([
    [5, 0],
    [-1, 0],
    [1, 2147483647],
    [1, -4],
  ])("refuses a descriptor of %i elements at byte %i, naming row and column", async (count, offset) => {
    const changed = Buffer.from(good);
    changed.writeInt32BE(count, 2880 + 12 + 4);
    changed.writeInt32BE(offset, 2880 + 12 + 8);
    const table = await tableOf(changed);
    expect(() => table.numbers(1, table.layout.columns[1]!)).toThrow(
      `column V points to ${count} elements at byte ${offset} of the heap: expected them within its 12 bytes`,
    );
  });

  it("holds no table larger than the limit", async () => {
    expect(await lineOfError(tableOf(good, 20))).toContain(
      "the table has 2 rows, 36 bytes: expected at most 20",
    );
  });
});

describe("any table", () => {
  const cell = fc.record({
    j: fc.integer({ min: -(2 ** 31), max: 2 ** 31 - 1 }),
    d: fc.double(),
    k: fc.bigInt({ min: -(2n ** 63n), max: 2n ** 63n - 1n }),
    v: fc.array(fc.integer({ min: 0, max: 255 }), { maxLength: 5 }),
    x: fc.array(fc.boolean(), { minLength: 13, maxLength: 13 }),
  });

  it("comes back as it was written", async () => {
    await fc.assert(
      fc.asyncProperty(fc.array(cell, { minLength: 1, maxLength: 20 }), async (rows) => {
        const table = await made([
          { name: "J", form: "J", cells: rows.map(({ j }) => j) },
          { name: "D", form: "D", cells: rows.map(({ d }) => d) },
          { name: "K", form: "K", cells: rows.map(({ k }) => k) },
          { name: "V", form: "QB", cells: rows.map(({ v }) => v) },
          { name: "X", form: "13X", cells: rows.map(({ x }) => x) },
        ]);
        const [j, d, k, v, x] = table.layout.columns;
        rows.forEach((row, i) => {
          expect(table.number(i, j!)).toBe(row.j);
          expect(table.number(i, d!)).toBe(row.d + 0);
          expect(table.integers(i, k!)).toEqual([row.k]);
          expect([...table.numbers(i, v!)]).toEqual(row.v);
          expect(table.bits(i, x!)).toEqual(row.x);
        });
      }),
    );
  });
});
