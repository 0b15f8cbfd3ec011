/** Flags set in copies of random-groups files: which bytes change, and how the copy reads. */
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { gunzipSync, gzipSync } from "node:zlib";
import { describe, expect, it } from "vitest";
import { binaryTable, card, real } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import {
  antennaTable,
  COMPLEX,
  DEC,
  fileMaker,
  freq,
  frequencyTable,
  type GroupFileSpec,
  groupFile,
  marker,
  parameters,
  RA,
  stokes,
  subbands,
} from "../../dataset/group-file.ts";
import { readAll } from "../../support/read-all.ts";
import { copyOf, differences, flag, lineOfRejection, outputFolder } from "./copies.ts";

const folder = outputFolder();
const file = fileMaker();
let made = 0;
const out = (name = "out.uvfits") => join(folder, `${made++}-${name}`);

/** Small values, so that every item type holds them; weights from 1 to 96. */
const small = (row: number, at: Readonly<Record<string, number>>) =>
  at.COMPLEX === 2 ? 1 + ((marker(row, at) >> 2) % 96) : (row + (at.FREQ ?? 0)) % 7;
/** Parameters that integers hold. */
const wholeParameters = [
  { ...parameters.uu!, scale: 1e-9 },
  parameters.vv!,
  { ...parameters.ww!, stored: (row: number) => row },
  { ...parameters.baseline!, scale: 1, stored: (row: number) => 256 * (1 + (row % 2)) + 3 },
  parameters.date!,
  { ...parameters.date2!, scale: 1 / 1024, stored: (row: number) => Math.floor(row / 2) },
];
const of = (spec: Partial<GroupFileSpec>) =>
  groupFile({ stored: small, parameters: wholeParameters, ...spec });

/** Antenna 2 in the second integration, two of three channels of sub-band 1, the second product. */
const FLAG = flag({
  antennas: [2],
  time: [60476.0009, 60476.001],
  subbands: [1],
  channels: [[1, 2]],
  polarizations: ["LL"],
});
/** The same where the first integration is at a quarter of the day. */
const PLAIN = { ...FLAG, time: [60476.2509, 60476.251] as const };
const FLAGGED = [`3.1.1.1`, `3.1.2.1`];

async function flaggedOf(path: string): Promise<string[]> {
  const { weight } = await readAll(await openDataset(path));
  return Array.from(weight).flatMap((value, i) =>
    value > 0 ? [] : [`${Math.floor(i / 12)}.${Math.floor(i / 6) % 2}.${Math.floor(i / 2) % 3}.${i % 2}`],
  );
}

describe("weights of random groups", () => {
  it.each([16, 32, 64, -32, -64] as const)(
    "turn negative where they are selected, BITPIX %i",
    async (bitpix) => {
      const path = file(of({ bitpix }));
      const to = out();
      const { before, after, into, counts } = await copyOf(path, to, [FLAG]);
      expect(into).toBe("weights");
      expect(counts.each[0]).toMatchObject({ samples: 2, unflagged: 2 });
      expect(await flaggedOf(to)).toEqual(FLAGGED);
      const [was, is] = [await readAll(await openDataset(path)), await readAll(await openDataset(to))];
      expect(is.real).toEqual(was.real);
      expect(Array.from(is.weight, Math.abs)).toEqual(Array.from(was.weight));
      // Of floats only the sign bit changes; of integers the bytes of two items at most.
      const changed = differences(before, after);
      if (bitpix < 0) expect(changed).toHaveLength(2);
      expect(changed.length).toBeLessThanOrEqual((2 * Math.abs(bitpix)) / 8);
    },
  );

  it("keep their size where BSCALE and BZERO shift them", async () => {
    // -w is stored as -s - 2 BZERO / BSCALE: -s - 40 here.
    const cards = [card("BSCALE", real(0.5)), card("BZERO", real(10))];
    const path = file(of({ bitpix: 16, cards }));
    const to = out();
    expect((await copyOf(path, to, [FLAG])).into).toBe("weights");
    const [was, is] = [await readAll(await openDataset(path)), await readAll(await openDataset(to))];
    expect(await flaggedOf(to)).toEqual(FLAGGED);
    expect(Array.from(is.weight, Math.abs)).toEqual(Array.from(was.weight));
  });

  it("stay as they are where they are zero, negative or not finite", async () => {
    const odd = [0, -3, Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY, 2 ** -149];
    const stored: GroupFileSpec["stored"] = (row, at) =>
      at.COMPLEX === 2 ? odd[(row + (at.FREQ ?? 0) * 2 + (at.STOKES ?? 0)) % 6]! : 1;
    const path = file(groupFile({ stored }));
    const to = out();
    const { before, after, counts } = await copyOf(path, to, [flag({})]);
    // One in six is positive and finite: the smallest there is.
    expect(differences(before, after)).toHaveLength(counts.union.unflagged);
    expect(counts.union.unflagged).toBe(48 / 6);
  });

  it("are the same bytes when flags are applied again, or overlap", async () => {
    const path = file(groupFile());
    const [once, twice] = [out(), out()];
    const first = await copyOf(path, once, [PLAIN, flag({ antennas: [2], subbands: [1] }, "F2")]);
    const second = await copyOf(once, twice, [PLAIN, flag({ antennas: [2], subbands: [1] }, "F2")]);
    expect(second.after.equals(first.after)).toBe(true);
    expect(second.counts.union).toMatchObject({ unflagged: 0 });
  });

  it("of nothing selected leave a copy byte for byte", async () => {
    const { before, after } = await copyOf(file(groupFile()), out(), []);
    expect(after.equals(before)).toBe(true);
  });

  it("keep what follows the last table, and a missing last padding", async () => {
    const bytes = Buffer.concat([groupFile(), Buffer.from("left over by a transfer")]);
    const trailing = await copyOf(file(bytes), out(), [PLAIN]);
    expect(differences(trailing.before, trailing.after)).toHaveLength(2);
    const cut = await copyOf(file(groupFile({ tables: [frequencyTable()] }).subarray(0, -2000)), out(), [
      PLAIN,
    ]);
    expect(differences(cut.before, cut.after)).toHaveLength(2);
  });

  it("are packed where the name ends in .gz, and unpacked where it does not", async () => {
    const plain = groupFile();
    const packed = file(gzipSync(plain), "night.uvfits.gz");
    const fromPacked = await copyOf(packed, out(), [PLAIN]);
    expect(differences(plain, fromPacked.after)).toHaveLength(2);
    const again = await copyOf(file(plain), out("out.uvfits.gz"), [PLAIN]);
    expect(gunzipSync(again.after).equals(fromPacked.after)).toBe(true);
  });
});

describe("the flag table of random groups", () => {
  /** Unsigned bytes hold no negative weights. */
  const bytes8 = () => file(of({ bitpix: 8, parameters: wholeParameters.map(inBytes) }));
  /** Baseline codes beyond a byte: 256 a1 + a2 as a scaled pair of parameters of one name. */
  const inBytes = (parameter: (typeof wholeParameters)[number]) =>
    parameter.name === "BASELINE"
      ? { ...parameter, scale: 256, zero: 3, stored: (row: number) => 1 + (row % 2) }
      : parameter.name === "VV---SIN"
        ? { ...parameter, stored: (row: number) => row + 2 }
        : parameter;

  it("takes the flags where weights cannot be negative, and says why", async () => {
    const path = bytes8();
    const to = out();
    const { before, after, into, insteadOf, tableRows } = await copyOf(path, to, [FLAG]);
    expect([into, tableRows]).toEqual(["flag-table", 1]);
    expect(insteadOf?.place).toBe("weights");
    expect(insteadOf?.why).toMatch(/^weights are stored as bytes without a sign .* cannot hold -\d+$/);
    // All that was there is there, byte for byte, and a table after it.
    expect(after.subarray(0, before.length).equals(before)).toBe(true);
    expect(after.toString("latin1", before.length)).toMatch(
      /^XTENSION= 'BINTABLE'[\s\S]*EXTNAME = 'ARRAY FG'/,
    );
    expect(await flaggedOf(to)).toEqual(FLAGGED);
  });

  it("is what to ask for when the weights were asked for and cannot hold the flags", async () => {
    const line = await lineOfRejection(copyOf(bytes8(), out(), [FLAG], { into: "weights" }));
    expect(line).toMatch(
      /the weights cannot hold these flags: .*\. Use --into flag-table, or leave --into out$/,
    );
  });

  it("takes the flags of files with one weight a group", async () => {
    const spec = { axes: [{ ...COMPLEX, length: 2 }, stokes(2), freq(3), subbands(2), RA, DEC] };
    const to = out();
    const { into, insteadOf } = await copyOf(file(groupFile(spec)), to, [PLAIN]);
    expect([into, insteadOf?.why]).toEqual([
      "flag-table",
      "the file has one weight for all samples of a group, if any",
    ]);
    expect(await flaggedOf(to)).toEqual(FLAGGED);
  });

  it("gets a later version that keeps the rows of the one that is there", async () => {
    const earlier = binaryTable({
      name: "ARRAY FG",
      version: 3,
      columns: [
        { name: "ANTS", form: "2J", cells: [[1, 0]] },
        { name: "IFS", form: "2J", cells: [[1, 1]] },
        { name: "CHANS", form: "2J", cells: [[1, 1]] },
        { name: "PFLAGS", form: "4X", cells: [[true, false, false, false]] },
        { name: "REASON", form: "10A", cells: ["shadowed"] },
      ],
    });
    const path = file(groupFile({ tables: [antennaTable(), frequencyTable(), earlier] }));
    const to = out();
    const { before, after } = await copyOf(path, to, [PLAIN], { into: "flag-table" });
    expect(after.subarray(0, before.length).equals(before)).toBe(true);
    expect(after.toString("latin1", before.length)).toMatch(/EXTVER {2}= +4[\s\S]*shadowed[\s\S]*F1 burst/);
    expect(await flaggedOf(to)).toEqual(["0.0.0.0", "2.0.0.0", ...FLAGGED]);
  });

  it("holds several fields, baselines and ranges as rows, and each sub-band run", async () => {
    const to = out();
    const many = flag({
      baselines: [
        [1, 3],
        [3, 2],
      ],
      channels: [
        [0, 0],
        [2, 9],
      ],
    });
    const { tableRows } = await copyOf(file(groupFile()), to, [many], { into: "flag-table" });
    expect(tableRows).toBe(4);
    expect((await flaggedOf(to)).filter((sample) => sample.split(".")[2] === "1")).toEqual([]);
    expect(await flaggedOf(to)).toHaveLength(4 * 2 * 2 * 2);
  });

  it("tells integrations apart that float32 days cannot", async () => {
    // 1 ms apart, 60 days after the reference date: a float32 step there is 0.3 s.
    const date2 = { ...parameters.date2!, stored: (row: number) => Math.floor(row / 2) / 86.4e6 };
    const date = { ...parameters.date!, zero: parameters.date!.zero! + 60 };
    const spec = {
      bitpix: -64 as const,
      parameters: [...Object.values({ ...parameters, date, date2 })],
    };
    const to = out();
    const start = 60476 + 60 + 1 / 86.4e6;
    const late = flag({ time: [start - 1e-10, start + 1e-10] });
    const { tableRows } = await copyOf(file(groupFile(spec)), to, [late], { into: "flag-table" });
    expect(tableRows).toBe(1);
    expect((await flaggedOf(to)).map((sample) => Number(sample[0]))).toEqual([
      ...Array(12).fill(2),
      ...Array(12).fill(3),
    ]);
  });

  it("is refused where times are named and nothing dates them, or bytes follow the last table", async () => {
    const undated = file(groupFile({ tables: [frequencyTable()] }));
    const line = await lineOfRejection(copyOf(undated, out(), [PLAIN], { into: "flag-table" }));
    expect(line).toMatch(/a flag names times, and no table of the file gives a reference date/);
    const trailing = file(Buffer.concat([groupFile(), Buffer.from("more")]));
    expect(await lineOfRejection(copyOf(trailing, out(), [PLAIN], { into: "flag-table" }))).toMatch(
      /bytes from \d+ on belong to no table.*Cut the file there/,
    );
  });

  it("is added to a packed file as to a plain one", async () => {
    const plain = await copyOf(file(groupFile()), out(), [PLAIN], { into: "flag-table" });
    const packed = file(gzipSync(groupFile()), "night.uvfits.gz");
    const { after } = await copyOf(packed, out(), [PLAIN], { into: "flag-table" });
    expect(after.equals(plain.after)).toBe(true);
  });
});

describe("a sample input", () => {
  it("changes in the sign bits of selected weights alone", async () => {
    const sample = new URL("../../../sample-inputs/three-faults.uvfits", import.meta.url).pathname;
    const { before, after, counts } = await copyOf(sample, out(), [
      flag({ antennas: [4], channels: [[3, 5]] }),
      flag({ polarizations: ["LL"], time: [61101.55, 61101.56] }, "F2"),
    ]);
    const changed = differences(before, after);
    expect(changed).toHaveLength(counts.union.unflagged);
    expect(changed.every((at) => (before[at]! ^ after[at]!) === 0x80)).toBe(true);
    expect(readFileSync(sample).equals(before)).toBe(true);
  });
});
