import { describe, expect, it } from "vitest";
import { openFits } from "../../../src/dataset/fits/hdus.ts";
import { binaryTable, card, groupsHeader, headerBlocks } from "../../../src/dataset/fits/write.ts";
import { groupFile, plainSpec } from "../group-file.ts";
import { lineOfError } from "../read-all.ts";
import { memorySource } from "./memory-cursor.ts";

const open = (bytes: Uint8Array) => openFits(memorySource(bytes));
const primary = (...cards: Parameters<typeof headerBlocks>[0]) =>
  headerBlocks([card("SIMPLE", true), card("BITPIX", 8), ...cards]);
const table = binaryTable({ name: "THINGS", columns: [{ name: "A", form: "1J", cells: [1, 2, 3] }] });
const empty = primary(card("NAXIS", 0));
const image = Buffer.concat([
  primary(card("NAXIS", 2), card("NAXIS1", 10), card("NAXIS2", 20)),
  Buffer.alloc(2880),
]);

/** A header with the value of one keyword put differently. */
function withValue(bytes: Uint8Array, keyword: string, value: string): Buffer {
  const changed = Buffer.from(bytes);
  for (let at = 0; at < changed.length; at += 80) {
    if (changed.toString("latin1", at, at + 8) !== keyword.padEnd(8)) continue;
    changed.write(`${keyword.padEnd(8)}= ${value.padStart(20)}`.padEnd(80), at, "latin1");
    return changed;
  }
  throw new Error(`no ${keyword}`);
}

describe("openFits", () => {
  it("finds every HDU with its kind, name and place, without reading data", async () => {
    const { hdus } = await open(Buffer.concat([image, table, table]));
    expect(hdus.map(({ index, kind, name, version }) => [index, kind, name, version])).toEqual([
      [1, "image", "", 1],
      [2, "binary table", "THINGS", 1],
      [3, "binary table", "THINGS", 1],
    ]);
    expect(hdus[0].dataBytes).toBe(200);
    expect(hdus[1]!.headerStart).toBe(5760);
    expect(hdus[1]!.header.place.part).toBe("HDU 2 (THINGS)");
  });

  it("tells random groups by NAXIS1 = 0 together with GROUPS = T, and no other file", async () => {
    expect((await open(groupFile())).hdus[0].kind).toBe("random groups");
    // Interchange files of the table kind carry GROUPS, too.
    const tables = primary(card("NAXIS", 0), card("GROUPS", true), card("GCOUNT", 0), card("PCOUNT", 0));
    expect((await open(tables)).hdus[0].kind).toBe("image");
  });

  it("takes the prototype of binary tables as one", async () => {
    const old = Buffer.from(table);
    old.write("XTENSION= 'A3DTABLE'", 0, "latin1");
    expect((await open(Buffer.concat([empty, old]))).hdus[1]!.kind).toBe("binary table");
  });

  it("names text tables and unknown extensions, and goes on behind them", async () => {
    const odd = Buffer.from(table);
    odd.write("XTENSION= 'DUMP    '", 0, "latin1");
    const text = Buffer.from(table);
    text.write("XTENSION= 'TABLE   '", 0, "latin1");
    const { hdus } = await open(Buffer.concat([empty, odd, text, table]));
    expect(hdus.map(({ kind }) => kind)).toEqual(["image", "other", "text table", "binary table"]);
  });

  it("accepts a last HDU without padding, with a note", async () => {
    const { hdus, notes } = await open(Buffer.concat([empty, table.subarray(0, 2880 + 12)]));
    expect(hdus).toHaveLength(2);
    expect(notes.list()).toEqual([
      {
        code: "missing-final-padding",
        kind: "note",
        text: "the file ends at byte 5772, without the padding of HDU 2 to byte 8640",
      },
    ]);
  });

  it("leaves out bytes behind the last HDU, with a note", async () => {
    const { hdus, notes } = await open(Buffer.concat([empty, table, Buffer.alloc(5000)]));
    expect(hdus).toHaveLength(2);
    expect(notes.list().map(({ code }) => code)).toEqual(["trailing-bytes"]);
  });

  it("says so when SIMPLE is F or a keyword stands twice with two values", async () => {
    const twice = primary(card("NAXIS", 0), card("OBJECT", "A"), card("OBJECT", "B"));
    const { notes } = await open(withValue(twice, "SIMPLE", "F"));
    expect(notes.list().map(({ code }) => code)).toEqual(["not-standard-fits", "keyword-twice"]);
  });

  it("refuses what is not FITS, naming the packing where it is known", async () => {
    expect(await lineOfError(open(Buffer.from("hello, world".repeat(300))))).toBe(
      "made.fits, byte 0: this is not a FITS file: expected the first card to be SIMPLE  = T. " +
        "visvet reads random-groups FITS and FITS-IDI files, plain or gzipped",
    );
    expect(await lineOfError(open(Buffer.from("BZh91AY&SY")))).toContain(
      "this is a bzip2 file. Unpack it first",
    );
    expect(await lineOfError(open(Buffer.from([0xfd, 0x37, 0x7a, 0x58, 0x5a, 0])))).toContain("an xz file");
    expect(await lineOfError(open(Buffer.from("SIMPLE  = maybe")))).toContain("the first card is malformed");
  });

  // FITS Standard 4.0, section 4.4.1: what each of these may be.
  it.each([
    ["BITPIX", "12", "BITPIX is 12: expected one of 8, 16, 32, 64, -32, -64"],
    ["BITPIX", "-32.5", "BITPIX is -32.5: expected a whole number from -64 to 64"],
    ["NAXIS", "1000", "NAXIS is 1000: expected a whole number from 0 to 999"],
    ["NAXIS", "-1", "NAXIS is -1: expected a whole number from 0 to 999"],
    ["NAXIS", "3", "NAXIS3 is missing: expected a whole number"],
    ["NAXIS1", "-5", "NAXIS1 is -5: expected a whole number of 0 or more"],
    ["NAXIS1", "2.5", "NAXIS1 is 2.5: expected a whole number of 0 or more"],
    ["NAXIS2", "1E300", "NAXIS2 is 1e+300: expected a whole number of 0 or more"],
    ["NAXIS2", "'twenty'", "NAXIS2 is twenty: expected a whole number of 0 or more"],
    ["NAXIS2", "T", "NAXIS2 is T: expected a whole number of 0 or more"],
  ])("refuses a header whose %s is %s", async (keyword, value, message) => {
    const line = await lineOfError(open(withValue(image, keyword, value)));
    expect(line).toMatch(/^made\.fits, HDU 1 \(primary\)/);
    expect(line).toContain(message);
  });

  it("refuses sizes whose product no file has", async () => {
    const huge = withValue(withValue(image, "NAXIS1", "9007199254740991"), "NAXIS2", "9007199254740991");
    expect(await lineOfError(open(huge))).toContain(
      "the header promises 8.11e+31 bytes of data (NAXISn 9007199254740991, 9007199254740991, PCOUNT 0, GCOUNT 1): " +
        "expected a size that a file can have",
    );
  });

  it("names the group in which a file of random groups ends, at every length that cuts one", async () => {
    const whole = groupFile({ tables: [] });
    const header = groupsHeader({ ...plainSpec, groups: plainSpec.rows }).length;
    const groupBytes = 4 * (6 + 3 * 2 * 3 * 2);
    for (let cut = header; cut < header + 4 * groupBytes; cut += 1) {
      const inside = Math.floor((cut - header) / groupBytes) + 1;
      expect(await lineOfError(open(whole.subarray(0, cut)))).toBe(
        `made.fits, HDU 1 (primary, random groups), byte ${header + (inside - 1) * groupBytes}: the header promises 4 ` +
          `groups of ${groupBytes} bytes, to byte ${header + 4 * groupBytes}; the file ends at byte ${cut}, inside ` +
          `group ${inside}: ${inside - 1} of 4 are whole. The copy is probably incomplete: compare its size with the original and copy it again`,
      );
    }
  });

  it("reads the file or refuses it with a place, wherever it is cut", async () => {
    const whole = groupFile();
    for (let cut = 1; cut < whole.length; cut += 97) {
      const outcome = await open(whole.subarray(0, cut)).then(
        ({ hdus }) => hdus.length,
        (error) => error.line as string,
      );
      if (typeof outcome === "number") expect(outcome).toBeGreaterThan(0);
      else
        expect(outcome).toMatch(
          /^made\.fits, (HDU \d.*, )?byte \d+: .*(the file ends at byte|not a FITS file|malformed)/,
        );
    }
  });

  it("names row and bytes of a table that is cut short", async () => {
    const line = await lineOfError(open(Buffer.concat([empty, table.subarray(0, 2880 + 6)])));
    expect(line).toContain(
      "HDU 2 (THINGS), byte 5764: the header promises 3 rows of 4 bytes, to byte 5772; the file ends at byte 5766, inside row 2",
    );
  });
});
