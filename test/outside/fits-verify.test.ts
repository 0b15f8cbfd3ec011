/** What we write is FITS by the checker of NASA's FITS Support Office (Debian package fitsverify). */
import { spawnSync } from "node:child_process";
import { describe, expect, it } from "vitest";
import { binaryTable, card, headerBlocks, real } from "../../src/dataset/fits/write.ts";
import {
  antennaTable,
  COMPLEX,
  DEC,
  fileMaker,
  freq,
  frequencyTable,
  groupFile,
  RA,
  sourceTable,
  stokes,
  subbands,
} from "../dataset/group-file.ts";
import { systemTool } from "../support/require.ts";

const fitsverify = systemTool("fitsverify");
const file = fileMaker();

function verdict(bytes: Uint8Array, ...options: string[]): string {
  const run = spawnSync(fitsverify!, ["-q", ...options, file(bytes)], { encoding: "utf8" });
  return run.stdout.trim();
}

describe.skipIf(fitsverify === undefined)("fitsverify", () => {
  const passed = /^verification OK/;

  it.each([8, 16, 32, 64, -32, -64] as const)(
    "passes random groups of BITPIX %i with their tables",
    (bitpix) => {
      const bytes = groupFile({
        bitpix,
        // The checker takes GCOUNT for the most parameters there can be: as many groups as parameters, then.
        rows: 6,
        axes: [COMPLEX, stokes(4), freq(5, 2.1e9, -8e6), subbands(2), RA, DEC],
        stored: () => 1,
        cards: [
          card("OBJECT", "It's Field A", "a comment"),
          card("EQUINOX", real(2000)),
          card("BSCALE", real(1)),
          card("BZERO", real(0)),
          { keyword: "HISTORY", comment: "made for a test" },
        ],
        tables: [antennaTable(), frequencyTable(), sourceTable([{ id: 1, name: "Field A", ra: 1, dec: 2 }])],
      });
      // Errors alone: it warns of the blanks in column names that the visibility convention prescribes, and misses
      // CTYPE1, CRVAL1 and CRPIX1 of the axis that random groups do not have.
      expect(verdict(bytes, "-e")).toMatch(passed);
    },
  );

  it("passes tables with a column of every type", () => {
    const primary = headerBlocks([
      card("SIMPLE", true),
      card("BITPIX", 8),
      card("NAXIS", 0),
      card("EXTEND", true),
    ]);
    const table = binaryTable({
      name: "EVERY",
      cards: [card("LONGSTRN", "OGIP 1.0"), card("REMARK", "long ".repeat(40).trim())],
      columns: [
        { name: "L", form: "3L", cells: [[true, false, null]] },
        { name: "X", form: "11X", cells: [Array(11).fill(true)] },
        { name: "B", form: "1B", cells: [255], keywords: { TNULL: 255 } },
        { name: "I", form: "1I", cells: [5], keywords: { TSCAL: real(0.5), TZERO: real(1) } },
        { name: "J", form: "6J", cells: [[1, 2, 3, 4, 5, 6]], keywords: { TDIM: "(3,2)" } },
        { name: "K", form: "1K", cells: [5n] },
        { name: "A", form: "8A", cells: ["Ridge"] },
        { name: "E", form: "1E", cells: [Number.NaN] },
        { name: "D", form: "1D", cells: [Number.POSITIVE_INFINITY] },
        { name: "C", form: "1C", cells: [[1, 2]] },
        { name: "M", form: "1M", cells: [[1, 2]] },
        { name: "P", form: "1PE", cells: [[1, 2, 3]] },
        { name: "Q", form: "1QJ", cells: [[1, 2]] },
        { name: "ZERO", form: "0D", cells: [[]] },
      ],
    });
    expect(verdict(Buffer.concat([primary, table]))).toMatch(passed);
  });

  it("fails what is not FITS, so that passing means something", () => {
    const bytes = Buffer.from(groupFile({ rows: 6 }));
    bytes.write("BITPIX  =                  -33", 80, "latin1");
    expect(verdict(bytes)).not.toMatch(passed);
  });
});
