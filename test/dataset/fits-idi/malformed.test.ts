/** Damaged and hostile FITS-IDI files: each is refused with its place, what was found and what was expected. */
import { truncateSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { binaryTable, card } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { InputError } from "../../../src/util/errors.ts";
import { fileMaker } from "../group-file.ts";
import {
  AXES,
  COLUMNS,
  frequency,
  geometry,
  idiFile,
  primary,
  ROWS,
  source,
  USUAL_AXES,
  type UvSpec,
  usualTables,
  uvData,
} from "../idi-file.ts";
import { lineOfError, readAll } from "../read-all.ts";

const file = fileMaker();
const open = (spec: Partial<UvSpec> = {}) => openDataset(file(idiFile(spec)));
const refusal = (bytes: Uint8Array) => lineOfError(openDataset(file(bytes, "made.idifits")));
const axes = (type: string, change: object) =>
  USUAL_AXES.map((axis) => (axis.type === type ? { ...axis, ...change } : axis));

/** The plain file with the value of one keyword of UV_DATA put differently; null takes the card away. */
function withValue(keyword: string, value: string | null, bytes: Buffer = idiFile()): Buffer {
  const changed = Buffer.from(bytes);
  const name = changed.indexOf("'UV_DATA '", 0, "latin1");
  const start = changed.lastIndexOf("XTENSION", name, "latin1");
  for (let at = start; changed.toString("latin1", at, at + 8) !== "END     "; at += 80) {
    if (changed.toString("latin1", at, at + 8) !== keyword.padEnd(8)) continue;
    const text = value === null ? "" : `${keyword.padEnd(8)}= ${value.padStart(20)}`;
    changed.write(text.padEnd(80), at, "latin1");
    return changed;
  }
  throw new Error(`no ${keyword}`);
}

/** The byte at which the rows of the plain file start, and of one row. */
const ROW_BYTES = 5 * 8 + 5 * 4 + 4 * 4 + 24 * 4;
const DATA_START = idiFile().length - 2880;

describe("the header of UV_DATA", () => {
  it("is that of the plain file, whose rows are where this test says", () => {
    expect(ROW_BYTES * ROWS).toBeLessThan(2880);
    expect(idiFile().readDoubleBE(DATA_START)).toBe(1e-9);
    expect(idiFile().readDoubleBE(DATA_START + ROW_BYTES)).toBe(2e-9);
  });

  it.each([
    ["MAXIS", "0", "MAXIS is 0: expected a whole number from 1 to 99"],
    ["MAXIS", "7", "MAXIS7 is missing: expected a whole number"],
    ["MAXIS", null, "MAXIS is missing: expected a whole number"],
    ["MAXIS3", "0", "the matrix axes (2 x 2 x 0 x 2 x 1 x 1) make 0 elements, column FLUX holds 24"],
    ["MAXIS3", "4", "the matrix axes (2 x 2 x 4 x 2 x 1 x 1) make 32 elements, column FLUX holds 24"],
    ["MAXIS3", "-3", "MAXIS3 is -3: expected a whole number of 0 or more"],
    ["MAXIS3", "99999999999999999999", "MAXIS3 is 100000000000000000000: expected a whole number"],
    [
      "CTYPE1",
      "'BEAM    '",
      "no axis of the matrix is called COMPLEX (found BEAM, STOKES, FREQ, BAND, RA, DEC)",
    ],
    ["CTYPE3", "'VELO-LSR'", "axis 3 is VELO: expected the channels by frequency (FREQ)"],
    [
      "CTYPE3",
      "'SPEED   '",
      "axis 3 (SPEED) has length 3: expected 1, or a COMPLEX, STOKES, FREQ or BAND axis",
    ],
    ["CRVAL2", "-9.0", "element 1 of the STOKES axis has code -9: expected 1 to 4"],
    ["CDELT2", "0.0", "element 2 of the STOKES axis has code -1 again: expected"],
    ["CRVAL3", "'high    '", "CRVAL3 is high: expected a number"],
    ["NAXIS1", "171", "columns take 172 bytes a row, NAXIS1 says 171: expected the same"],
    ["TFORM12", "'24C     '", "columns take 268 bytes a row, NAXIS1 says 172: expected the same"],
    ["TFORM12", "'96A     '", "TFORM12 is 96A: expected a matrix of numbers (B I J K E D)"],
    ["TFORM12", "'1PE(24) '", "columns take 84 bytes a row"],
    ["TTYPE1", "'U       '", "no column UU of numbers (found U, VV, WW, DATE, TIME, BASELINE, ARRAY"],
    ["TTYPE6", "'BASELIN '", "no column BASELINE of numbers"],
    ["NAXIS2", "-1", "NAXIS2 is -1: expected a whole number of 0 or more"],
  ])("with %s = %s is refused", async (keyword, value, message) => {
    const line = await refusal(Buffer.concat([withValue(keyword, value), Buffer.alloc(2880 * 4)]));
    expect(line).toMatch(/made\.idifits, HDU 6 \(UV_DATA\)(, byte \d+)?: /);
    expect(line).toContain(message);
  });

  it("with two matrices, or a COMPLEX axis of another length, is refused", async () => {
    expect(await lineOfError(open({ cards: [card("NMATRIX", 2)] }))).toContain(
      "NMATRIX is 2: expected one matrix a row",
    );
    expect(await lineOfError(open({ axes: axes("COMPLEX", { length: 4 }) }))).toContain(
      "the COMPLEX axis has length 4: expected 3 (real, imaginary, weight) or 2",
    );
    expect(await lineOfError(open({ axes: axes("RA", { length: 2 }) }))).toContain(
      "axis 5 (RA) has length 2",
    );
  });

  it("of a row larger than memory should hold is refused before anything is read", async () => {
    const wide = withValue("TFORM12", "'200000000E'", withValue("NAXIS1", "800000076"));
    // The bytes are promised: a sparse file costs nothing.
    const path = file(withValue("NAXIS2", "1", wide));
    truncateSync(path, DATA_START + 800_000_076);
    expect(await lineOfError(openDataset(path))).toContain(
      "a row takes 800000076 bytes: expected at most 536870912. Split the file by sub-band or channel",
    );
  });
});

describe("NAXIS2", () => {
  it("that is larger than the file is refused with the count of the rows that are there", async () => {
    const bytes = withValue("NAXIS2", "100").subarray(0, DATA_START + 4 * ROW_BYTES + 10);
    expect(await refusal(bytes)).toMatch(
      new RegExp(
        `HDU 6 \\(UV_DATA\\), byte ${DATA_START + 4 * ROW_BYTES}: the header promises 100 rows of ${ROW_BYTES} bytes, ` +
          `to byte ${DATA_START + 100 * ROW_BYTES}; the file ends at byte ${bytes.length}, inside row 5: 4 of 100 are whole`,
      ),
    );
  });

  it("of 0 in a header that was written before the data is refused with the count that would fit", async () => {
    const bytes = withValue("NAXIS2", "0").subarray(0, DATA_START + 4 * ROW_BYTES);
    expect(await refusal(bytes)).toContain(
      `NAXIS2 is 0: the table holds no visibilities; 4 rows of ${ROW_BYTES} bytes would fit between the header and the ` +
        "end of the file. The header was probably written before the data",
    );
    expect(await refusal(withValue("NAXIS2", "0").subarray(0, DATA_START))).toMatch(
      /NAXIS2 is 0: the table holds no visibilities$/,
    );
  });
});

describe("rows", () => {
  const withColumn = (name: string, value: number, form = "1J") =>
    open({ columns: { [name]: { form, cell: (row) => (row === 2 ? value : 259) } } });
  const place = `HDU 6 (UV_DATA), byte ${DATA_START + 2 * ROW_BYTES}: row 3: `;

  it.each([
    ["BASELINE", -1, "BASELINE is -1: expected 256 x antenna 1 + antenna 2, or 65536 + 2048 x"],
    ["BASELINE", 2 ** 30, "BASELINE is 1073741824"],
    ["ARRAY", -1, "ARRAY is -1: expected a whole number from 0 to 9999"],
    ["SOURCE_ID", -7, "SOURCE_ID is -7: expected a whole number from 0 to 2147483647"],
  ])("whose %s is %i are refused with their byte", async (name, value, message) => {
    expect(await lineOfError(withColumn(name, value))).toContain(place + message);
  });

  it("whose baseline is not finite are refused, too", async () => {
    expect(await lineOfError(withColumn("BASELINE", Number.NaN, "1E"))).toContain("row 3: BASELINE is NaN");
  });

  it("whose time is not finite stay without one, said as a fault", async () => {
    const dataset = await open({
      columns: { TIME: { form: "1D", cell: (row) => (row === 1 ? Number.NaN : 0) } },
    });
    expect((await readAll(dataset)).time[1]).toBeNaN();
    expect(dataset.notes.map(({ code }) => code)).toEqual(["time-not-finite"]);
  });

  it("are counted within their table, whatever tables stand before", async () => {
    const bad = { BASELINE: { form: "1J", cell: (row: number) => (row === 3 ? -1 : 259) } };
    const parts = [uvData({ rows: 2 }), uvData({ rows: 2, firstRow: 2, columns: bad })];
    expect(await refusal(Buffer.concat([primary, ...usualTables(), ...parts]))).toMatch(
      /HDU 7 \(UV_DATA\), byte \d+: row 2: BASELINE is -1/,
    );
  });
});

describe("small tables", () => {
  it("that make no sense are refused with their place", async () => {
    const odd = (name: string) => binaryTable({ name, columns: [{ name: "A", form: "1J", cells: [1] }] });
    const replaced = (table: Uint8Array, at: number) =>
      Buffer.concat([primary, ...usualTables().map((one, i) => (i === at ? table : one)), uvData()]);
    expect(await refusal(replaced(odd("ARRAY_GEOMETRY"), 0))).toContain(
      "HDU 2 (ARRAY_GEOMETRY): no column STABXYZ",
    );
    expect(await refusal(replaced(odd("ANTENNA"), 1))).toContain("HDU 3 (ANTENNA): no column ANNAME");
    expect(await refusal(replaced(odd("FREQUENCY"), 2))).toContain("HDU 4 (FREQUENCY): no column IF FREQ");
    expect(await refusal(replaced(odd("SOURCE"), 3))).toContain("HDU 5 (SOURCE): no column ID. NO.");
    expect(await refusal(replaced(frequency({ offsets: [[0]] }), 2))).toContain(
      "row 1 gives 1 sub-bands, the rows have 2: expected as many",
    );
    const numbered = [geometry({ numbers: [1, 70_000, 3] }), frequency(), source(), uvData()];
    expect(await refusal(Buffer.concat([primary, ...numbered]))).toContain(
      "HDU 2 (ARRAY_GEOMETRY): row 2: NOSTA is 70000: expected a whole number from 0 to 65535",
    );
  });

  it("may leave strings padded with NULs, and columns without width", async () => {
    const bytes = idiFile({}, [geometry({ names: ["ANT1\0\0", "ANT2", "ANT3"] }), frequency(), source()]);
    // The writer turns NULs into "?": put them in by hand.
    bytes.write("\0\0", bytes.indexOf("ANT1??", 0, "latin1") + 4, "latin1");
    const dataset = await openDataset(file(bytes));
    expect(dataset.array.antennas.map(({ name }) => name)).toEqual(["ANT1", "ANT2", "ANT3"]);
  });
});

describe("a file that is cut or damaged anywhere", () => {
  const whole = idiFile();

  it("is refused at every card, block and item, or reads as the whole does", async () => {
    const cuts = new Set<number>();
    for (let at = 0; at < DATA_START; at += 720) cuts.add(at);
    for (let at = DATA_START - 240; at < DATA_START + ROWS * ROW_BYTES; at += 28) cuts.add(at);
    for (const cut of cuts) {
      const opened = openDataset(file(whole.subarray(0, cut), "cut.idifits"));
      await expect(opened, `cut at ${cut}`).rejects.toThrow(InputError);
    }
    // The padding alone is missing.
    const unpadded = await openDataset(file(whole.subarray(0, DATA_START + ROWS * ROW_BYTES)));
    expect(unpadded.notes.map(({ code }) => code)).toEqual(["missing-final-padding"]);
    expect(await readAll(unpadded)).toEqual(await readAll(await openDataset(file(whole))));
  });

  it("gives an error for the user or a dataset that reads, whatever bytes are changed", async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.array(fc.tuple(fc.nat({ max: whole.length - 1 }), fc.nat({ max: 255 })), {
          minLength: 1,
          maxLength: 8,
        }),
        async (changes) => {
          const bytes = Buffer.from(whole);
          for (const [at, value] of changes) bytes[at] = value;
          try {
            await readAll(await openDataset(file(bytes, "damaged.idifits")));
          } catch (error) {
            expect(error).toBeInstanceOf(InputError);
          }
        },
      ),
      { numRuns: 150 },
    );
  });

  it("says nothing of columns that the format does not know", async () => {
    const more = { GATEID: { form: "1J", cell: () => 1 }, EXTRA: { form: "0D", cell: () => [] } };
    const dataset = await open({
      columns: { ...COLUMNS, ...more },
      axes: [AXES.complex, ...USUAL_AXES.slice(1)],
    });
    expect(dataset.notes).toEqual([]);
  });
});
