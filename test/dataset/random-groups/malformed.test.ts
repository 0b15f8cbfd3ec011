/** Damaged and hostile random-groups files: each is refused with its place, what was found and what was expected. */
import { truncateSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { binaryTable, card, groupsHeader, real } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { InputError } from "../../../src/util/errors.ts";
import {
  antennaTable,
  COMPLEX,
  DEC,
  fileMaker,
  freq,
  frequencyTable,
  type GroupFileSpec,
  groupFile,
  parameters,
  plainSpec,
  RA,
  stokes,
  subbands,
} from "../group-file.ts";
import { lineOfError, readAll } from "../read-all.ts";

const file = fileMaker();
const open = (spec: Partial<GroupFileSpec> = {}) => openDataset(file(groupFile(spec)));
const refusal = (bytes: Uint8Array) => lineOfError(openDataset(file(bytes)));
const without = (name: string) =>
  plainSpec.parameters.filter((parameter) => !parameter.name.startsWith(name));

/** The plain file with the value of one keyword of the primary header put differently. */
function withValue(keyword: string, value: string, bytes = groupFile()): Buffer {
  const changed = Buffer.from(bytes);
  for (let at = 0; changed.toString("latin1", at, at + 8) !== "END     "; at += 80) {
    if (changed.toString("latin1", at, at + 8) !== keyword.padEnd(8)) continue;
    changed.write(`${keyword.padEnd(8)}= ${value.padStart(20)}`.padEnd(80), at, "latin1");
    return changed;
  }
  throw new Error(`no ${keyword}`);
}

describe("sizes in the header", () => {
  it.each([
    ["GCOUNT", "0", "GCOUNT is 0: the file holds no visibilities"],
    ["GCOUNT", "-4", "GCOUNT is -4: expected a whole number of 0 or more"],
    ["GCOUNT", "4.5", "GCOUNT is 4.5: expected a whole number of 0 or more"],
    ["GCOUNT", "9007199254740991", "expected a size that a file can have"],
    ["GCOUNT", "1D300", "GCOUNT is 1e+300: expected a whole number of 0 or more"],
    ["GCOUNT", "'many    '", "GCOUNT is many: expected a whole number of 0 or more"],
    ["PCOUNT", "0", "PCOUNT is 0: expected parameters such as UU, VV, WW, BASELINE and DATE"],
    ["PCOUNT", "-1", "PCOUNT is -1: expected a whole number of 0 or more"],
    ["NAXIS2", "0", "an axis of the group has length 0: expected 1 or more"],
    ["NAXIS2", "4", "the COMPLEX axis has length 4: expected 3 (real, imaginary, weight) or 2"],
    ["NAXIS2", "1", "the COMPLEX axis has length 1: expected 3"],
    ["NAXIS3", "-2", "NAXIS3 is -2: expected a whole number of 0 or more"],
    ["NAXIS4", "99999999999999999999", "NAXIS4 is 100000000000000000000: expected a whole number"],
    ["CRVAL3", "-9.0", "element 1 of the STOKES axis has code -9: expected 1 to 4"],
    ["CDELT3", "0.0", "element 2 of the STOKES axis has code -1 again: expected"],
    ["CRVAL3", "0.5", "element 1 of the STOKES axis has code 0.5"],
    ["CRVAL4", "'high    '", "CRVAL4 is high: expected a number"],
    [
      "CTYPE2",
      "'BEAM    '",
      "no axis of the group is called COMPLEX (found BEAM, STOKES, FREQ, IF, RA, DEC)",
    ],
    ["CTYPE4", "'VELO-LSR'", "axis 4 is VELO: expected the channels by frequency (FREQ)"],
    [
      "CTYPE4",
      "'SPEED   '",
      "axis 4 (SPEED) has length 3: expected 1, or a COMPLEX, STOKES, FREQ or IF axis",
    ],
    [
      "CTYPE5",
      "'FREQ    '",
      "axis 5 (FREQ) has length 2: expected 1, or a COMPLEX, STOKES, FREQ or IF axis once",
    ],
    ["NAXIS6", "2", "axis 6 (RA) has length 2"],
    ["PSCAL1", "'one     '", "PSCAL1 is one: expected a number"],
  ])("%s = %s is refused", async (keyword, value, message) => {
    // A file long enough for the sizes that are merely wrong, so that the right thing is blamed.
    const line = await refusal(Buffer.concat([withValue(keyword, value), Buffer.alloc(2880 * 4)]));
    expect(line).toMatch(/, HDU 1 \(primary, random groups\)(, byte \d+)?: /);
    expect(line).toContain(message);
  });

  it("of a group larger than memory should hold are refused before anything is read", async () => {
    const header = groupsHeader({
      ...plainSpec,
      axes: [COMPLEX, stokes(2), freq(50_000_000), subbands(1), RA, DEC],
      groups: 1,
    });
    // Promise the bytes, too: a sparse file costs nothing.
    const path = file(header);
    truncateSync(path, header.length + 4 * (6 + 300_000_000));
    expect(await lineOfError(openDataset(path))).toContain(
      "a group takes 1200000024 bytes: expected at most 536870912. Split the file by sub-band or channel",
    );
  });
});

describe("missing parameters", () => {
  it.each([
    ["UU", "no parameter UU (found VV---SIN, WW---SIN, BASELINE, DATE, DATE)"],
    ["VV", "no parameter VV"],
    ["DATE", "no parameter DATE"],
    ["BASELINE", "no parameter BASELINE, nor ANTENNA1 and ANTENNA2"],
  ])("%s is refused", async (name, message) => {
    expect(await lineOfError(open({ parameters: without(name) }))).toContain(message);
  });

  it("ANTENNA1 without ANTENNA2 is refused", async () => {
    const lone = [...without("BASELINE"), { name: "ANTENNA1", stored: () => 1 }];
    expect(await lineOfError(open({ parameters: lone }))).toContain("nor ANTENNA1 and ANTENNA2");
  });
});

describe("groups that name no baseline, source or antenna", () => {
  const groupBytes = 4 * (6 + 36);

  it.each([
    [Number.NaN, "NaN"],
    [-1, "-1"],
    [1e9, "1000000000"],
    [Number.POSITIVE_INFINITY, "Infinity"],
  ])("BASELINE = %d is refused at its group and byte", async (code, shown) => {
    const baseline = { ...parameters.baseline!, stored: (row: number) => (row === 2 ? code : 258) };
    const bytes = groupFile({
      parameters: plainSpec.parameters.map((p) => (p.name === "BASELINE" ? baseline : p)),
    });
    const start = groupsHeader({ ...plainSpec, groups: 4 }).length;
    expect(await refusal(bytes)).toContain(
      `HDU 1 (primary, random groups), byte ${start + 2 * groupBytes}: group 3: BASELINE is ${shown}: expected 256 x antenna 1 + ` +
        "antenna 2, or 65536 + 2048 x antenna 1 + antenna 2. The data are damaged there",
    );
  });

  it("SOURCE and ANTENNA1 that are no numbers are refused", async () => {
    const source = { name: "SOURCE", stored: () => Number.NaN };
    expect(await lineOfError(open({ parameters: [...plainSpec.parameters, source] }))).toContain(
      "group 1: SOURCE is NaN: expected a whole number from 0 to 2147483647",
    );
    const antennas = ["ANTENNA1", "ANTENNA2"].map((name) => ({ name, stored: () => 70_000 }));
    expect(await lineOfError(open({ parameters: [...without("BASELINE"), ...antennas] }))).toContain(
      "group 1: ANTENNA1 is 70000: expected a whole number from 0 to 65535",
    );
  });
});

describe("hostile tables", () => {
  it("of far too many antennas or sources are refused", async () => {
    const many = Array.from({ length: 70_000 }, (_, i) => i);
    const table = binaryTable({ name: "AN", columns: [{ name: "NOSTA", form: "1J", cells: many }] });
    expect(await lineOfError(open({ tables: [table] }))).toContain(
      "the AN table has 70000 rows: expected at most 65535",
    );
    const sources = binaryTable({ name: "SU", columns: [{ name: "ID. NO.", form: "1J", cells: many }] });
    expect(await lineOfError(open({ tables: [antennaTable(), frequencyTable(), sources] }))).toContain(
      "the SU table has 70000 rows: expected at most 65536",
    );
  });

  it("with antenna or source numbers that are none are refused", async () => {
    const numbers = antennaTable({ numbers: [1, -5, 3] });
    expect(await lineOfError(open({ tables: [numbers, frequencyTable()] }))).toContain(
      "row 2: NOSTA is -5: expected a whole number from 0 to 65535",
    );
  });

  it("say each oddity a few times and count the rest", async () => {
    const odd = Array.from({ length: 12 }, (_, i) =>
      binaryTable({
        name: "AN",
        version: i < 6 ? 1 : 2,
        columns: [{ name: "STABXYZ", form: "3D", cells: [[6.4e6, 0, 0]] }],
      }),
    );
    const dataset = await open({ tables: [...odd, frequencyTable()] });
    const twice = dataset.notes.filter(({ code }) => code === "duplicate-table");
    expect(twice).toHaveLength(5);
    expect(twice[4]!.text).toContain("(and 5 more of this kind)");
  });

  it("leave hostile names as they are: they are cleaned where they are shown", async () => {
    const cards = [card("OBJECT", "a"), card("EPOCH", real(2000))];
    const bytes = groupFile({ cards });
    const at = bytes.indexOf("'a ");
    bytes[at + 1] = 0x1b;
    const dataset = await openDataset(file(bytes));
    expect(dataset.fields[0]!.name).toBe("\u001b");
  });
});

describe("any damage", () => {
  it("to any byte of the headers gives a dataset or an InputError, never anything else", async () => {
    const whole = groupFile();
    const headers = groupsHeader({ ...plainSpec, groups: 4 }).length;
    await fc.assert(
      fc.asyncProperty(
        fc.array(fc.record({ at: fc.nat({ max: headers - 1 }), byte: fc.integer({ min: 32, max: 126 }) }), {
          minLength: 1,
          maxLength: 8,
        }),
        async (changes) => {
          const damaged = Buffer.from(whole);
          for (const { at, byte } of changes) damaged[at] = byte;
          try {
            await readAll(await openDataset(file(damaged)));
          } catch (error) {
            expect(error).toBeInstanceOf(InputError);
          }
        },
      ),
      { numRuns: 300 },
    );
  });

  it("to values in the header gives a dataset or an InputError, never anything else", async () => {
    const keywords = [
      "BITPIX",
      "NAXIS",
      "NAXIS1",
      "NAXIS2",
      "NAXIS3",
      "NAXIS4",
      "NAXIS5",
      "PCOUNT",
      "GCOUNT",
      "GROUPS",
    ];
    const more = [
      "CRVAL3",
      "CDELT3",
      "CRPIX3",
      "CRVAL4",
      "CDELT4",
      "PSCAL4",
      "PZERO5",
      "CTYPE3",
      "PTYPE1",
      "EXTEND",
    ];
    const values = [
      "-1",
      "0",
      "1",
      "2",
      "7",
      "99",
      "1E30",
      "-1E-30",
      "T",
      "'x       '",
      "9007199254740993",
      "",
      "(1,2)",
    ];
    await fc.assert(
      fc.asyncProperty(
        fc.constantFrom(...keywords, ...more),
        fc.constantFrom(...values),
        async (keyword, value) => {
          try {
            await readAll(await openDataset(file(withValue(keyword, value))));
          } catch (error) {
            expect(error).toBeInstanceOf(InputError);
          }
        },
      ),
      { numRuns: 200 },
    );
  });

  it("to the bytes of the tables gives a dataset or an InputError, never anything else", async () => {
    const whole = groupFile();
    const start = groupsHeader({ ...plainSpec, groups: 4 }).length + 2880;
    await fc.assert(
      fc.asyncProperty(
        fc.array(
          fc.record({ at: fc.integer({ min: start, max: whole.length - 1 }), byte: fc.nat({ max: 255 }) }),
          {
            minLength: 1,
            maxLength: 8,
          },
        ),
        async (changes) => {
          const damaged = Buffer.from(whole);
          for (const { at, byte } of changes) damaged[at] = byte;
          try {
            await readAll(await openDataset(file(damaged)));
          } catch (error) {
            expect(error).toBeInstanceOf(InputError);
          }
        },
      ),
      { numRuns: 200 },
    );
  });
});
