import { spawnSync } from "node:child_process";
import { mkdtemp, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import fc from "fast-check";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { Dataset, Setup } from "../../src/dataset/dataset.ts";
import { degreesOf } from "../../src/dataset/fits-idi/small-tables.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { simulateFile, truthPathOf } from "../../src/simulate/simulate-file.ts";
import { writeFitsIdi } from "../../src/simulate/write-fits-idi.ts";
import { InputError } from "../../src/util/errors.ts";
import { gridRows, memoryDataset } from "../support/memory-dataset.ts";
import { readAll, sameBits } from "../support/read-all.ts";
import { systemTool } from "../support/require.ts";
import { CLEAN, FAULTY, simulated } from "../support/scenarios.ts";

const SAMPLES = fileURLToPath(new URL("../../sample-inputs/", import.meta.url));

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-idi-"));
});
afterAll(() => rm(folder, { recursive: true, force: true }));

const small = { time: { duration: "3min" } } as const;

function setup(id: number, start: number, width: number, sign = 1): Setup {
  return {
    id,
    frequencies: Float64Array.from(
      { length: 6 },
      (_, i) => start + 5e7 * Math.floor(i / 3) + sign * width * (i % 3),
    ),
    channelWidths: new Float64Array(2).fill(width),
  };
}

/** Rows of two arrays, three setups and three fields, with weights by channel, flags, and values that are not finite. */
function mixed(): Dataset {
  const base = memoryDataset({
    rows: gridRows(4, 6).map((row, i) => ({
      ...row,
      time: i === 3 ? Number.NaN : row.time,
      u: i === 5 ? Number.NaN : row.u!,
      subarray: 1 + (i % 2),
      setup: i % 3,
      field: [4, 9, 2][i % 3]!,
      integration: i === 7 ? Number.NaN : 10 + i,
    })),
    subbands: 2,
    channels: 3,
    polarizations: ["XX", "YY"],
    sample: (row, subband, channel, p) => [
      row + channel / 7,
      row === 2 ? Number.NaN : subband - p / 3,
      [1.1, -2.2, 0, Number.NaN, Number.POSITIVE_INFINITY, 1e-40][(row + channel) % 6]!,
    ],
    // A width that single precision does not hold.
    dataset: { setups: [setup(1, 1.4e9, 1e6 / 3), setup(5, 2.2e9, 2e6), setup(7, 3e9, 1e6, -1)] },
  });
  return {
    ...base,
    array: { ...base.array, fromTable: true, referenceDay: 60_000, siderealTimeAtReference: 123.25 },
  };
}

const noWeights = (): Dataset => ({
  ...simulated({ ...small, weights: "unity" }).dataset,
  hasWeights: false,
});

/** Every kind of dataset that a file may hold. */
const CASES: readonly (readonly [string, () => Dataset])[] = [
  ["circular feeds", () => CLEAN.circular().dataset],
  ["Stokes parameters", () => simulated({ ...small, polarizations: ["I", "Q", "U", "V"] }).dataset],
  ["one product", () => simulated({ ...small, polarizations: ["LL"] }).dataset],
  ["products in reverse order", () => simulated({ ...small, polarizations: ["LL", "RR"] }).dataset],
  ["several fields and scans", () => CLEAN.fieldsAndGaps().dataset],
  [
    "falling frequencies in sub-bands",
    () => simulated({ ...small, frequency: { descending: true, subbands: 3 } }).dataset,
  ],
  ["one channel", () => simulated({ ...small, frequency: { channels: 1 } }).dataset],
  ["a local frame", () => simulated({ ...small, array: { frame: "local" } }).dataset],
  ["values that are not finite", () => FAULTY.notFinite().dataset],
  ["flags by channel", () => FAULTY.flaggedChannels().dataset],
  ["autocorrelations", () => simulated({ ...small, autocorrelations: true }).dataset],
  ["arrays, setups and fields mixed", mixed],
  ["no weights", noWeights],
];

async function expectSame(written: Dataset, read: Dataset): Promise<void> {
  expect(read.shape).toEqual(written.shape);
  expect(read.polarizations).toEqual(written.polarizations);
  expect(read.rows).toBe(written.rows);
  expect([read.unit, read.hasWeights]).toEqual([written.unit, written.hasWeights]);
  expect(read.array).toEqual(written.array);
  expect(read.fields).toEqual(written.fields);
  expect(read.setups.map(({ id }) => id)).toEqual(written.setups.map(({ id }) => id));
  read.setups.forEach(({ frequencies, channelWidths }, i) => {
    expect(channelWidths).toEqual(written.setups[i]!.channelWidths);
    // A sum of three in place of one: 1e-6 Hz of 1e9.
    frequencies.forEach((hertz, k) => {
      expect(Math.abs(hertz - written.setups[i]!.frequencies[k]!)).toBeLessThan(1e-6);
    });
  });
  const [ours, theirs] = [await readAll(written), await readAll(read)];
  for (const column of ["real", "imag", "weight", "time", "u", "v", "w", "integration"] as const) {
    expect(sameBits(theirs[column], ours[column]), column).toBe(true);
  }
  for (const column of ["antenna1", "antenna2", "subarray", "field", "setup"] as const) {
    expect([...theirs[column]], column).toEqual([...ours[column]]);
  }
}

describe("a written file", () => {
  it.each(CASES)("of %s reads back as the dataset it was written from, bit for bit", async (name, make) => {
    const dataset = make();
    const path = join(folder, `${name}.idifits`);
    await writeFitsIdi(dataset, path);
    await expectSame(dataset, await openDataset(path));
  });

  it("keeps weights in a column while they are the same in all channels, else in the matrix", async () => {
    const flat = await readFile(join(folder, "circular feeds.idifits"), "latin1");
    const flagged = await readFile(join(folder, "flags by channel.idifits"), "latin1");
    expect([flat.includes("'WEIGHT  '"), flagged.includes("'WEIGHT  '")]).toEqual([true, false]);
    expect(flat).toMatch(/MAXIS1 {2}= +2 /);
    expect(flagged).toMatch(/MAXIS1 {2}= +3 /);
  });

  it("may hold a range of the rows, so that several files are one dataset", async () => {
    const dataset = mixed();
    const all = await readAll(dataset);
    const [first, end] = [7, 22];
    const path = join(folder, "part.idifits");
    const done: number[] = [];
    await writeFitsIdi(dataset, path, { rows: [first, end], onRows: (rows, of) => done.push(rows, of) });
    const part = await openDataset(path);
    expect(part.rows).toBe(15);
    expect(part.fields.map(({ id }) => id)).toEqual(dataset.fields.map(({ id }) => id));
    const read = await readAll(part);
    expect([...read.time]).toEqual([...all.time.slice(first, end)]);
    expect([...read.weight]).toEqual([...all.weight.slice(first * 12, end * 12)]);
    expect(done).toEqual([15, 15]);
  });

  // Degrees that differ by a bit may give the same radians or others: the ones that give these are found.
  it("keeps places in the sky to the last bit", () => {
    fc.assert(
      fc.property(fc.double({ min: 0, max: 360, noNaN: true }), (degrees) => {
        const radians = degrees * (Math.PI / 180);
        expect(degreesOf(radians) * (Math.PI / 180)).toBe(radians);
      }),
    );
  });

  it("names large antenna numbers by the wider code", async () => {
    const layout = { kind: "ring", antennas: 3, radius: "100m" } as const;
    const { dataset } = simulated({ ...small, array: { layout, numbers: [1, 260, 2000] } });
    const path = join(folder, "large.idifits");
    await writeFitsIdi(dataset, path);
    await expectSame(dataset, await openDataset(path));
  });

  const fitsverify = systemTool("fitsverify");
  it.skipIf(fitsverify === undefined).each(CASES)("of %s passes fitsverify", async (name, make) => {
    const path = join(folder, `${name} verified.idifits`);
    await writeFitsIdi(make(), path);
    const { stdout } = spawnSync(fitsverify!, [path], { encoding: "utf8" });
    const said = stdout.split("\n").filter((line) => /\*\*\* (Warning|Error):/.test(line));
    expect(stdout).toMatch(/\d+ warning\(s\) and 2 error\(s\)/);
    // The format's own ways, which the verifier does not know: GROUPS = T with GCOUNT and PCOUNT of 0 in a primary HDU
    // without data, and the axes of a matrix in a column.
    const ours = said.filter(
      (line) =>
        !/[PG]COUNT is not allowed in a primary array/.test(line) &&
        !/C(TYPE|RVAL|DELT|RPIX)\d: index \d is not in range 1-2 \(NAXIS\)/.test(line),
    );
    expect(ours).toEqual([]);
  });
});

describe("the sample in FITS-IDI", () => {
  it("is what its random groups give, byte for byte, opens without a note, and stands on the page", async () => {
    const path = join(folder, "formats.idifits");
    await writeFitsIdi(await openDataset(join(SAMPLES, "formats.uvfits")), path);
    expect((await readFile(path)).equals(await readFile(join(SAMPLES, "formats.idifits")))).toBe(true);
    expect((await openDataset(path)).notes).toEqual([]);
    expect(await readFile(join(SAMPLES, "README.md"), "utf8")).toContain("`formats.idifits`");
  });

  it("holds what its scenario gives in either format", async () => {
    const path = join(folder, "again.idifits");
    await simulateFile(join(SAMPLES, "formats.scenario.yaml"), path);
    const truth = JSON.parse(await readFile(truthPathOf(path), "utf8")) as object;
    const kept = JSON.parse(await readFile(join(SAMPLES, "formats.truth.json"), "utf8")) as object;
    expect(truth).toEqual({ ...kept, dataset: "again" });
    const [made, sample] = [await openDataset(path), await openDataset(join(SAMPLES, "formats.idifits"))];
    const [ours, theirs] = [await readAll(made), await readAll(sample)];
    for (const column of ["real", "imag", "weight", "time", "u", "v", "w"] as const) {
      expect(sameBits(theirs[column], ours[column]), column).toBe(true);
    }
  });
});

describe("writing", () => {
  it("refuses to overwrite, and leaves what is there", async () => {
    const path = join(folder, "there.idifits");
    await writeFile(path, "mine");
    await expect(writeFitsIdi(simulated(small).dataset, path)).rejects.toThrow(InputError);
    expect(await readFile(path, "utf8")).toBe("mine");
  });

  it("leaves nothing behind when it fails halfway", async () => {
    const { dataset } = simulated(small);
    const broken: Dataset = {
      ...dataset,
      async *blocks(request) {
        let given = 0;
        for await (const block of dataset.blocks({ ...request, blockRows: 10 })) {
          if (request.want === "samples" && given++ > 3) throw new Error("the disk has gone");
          yield block;
        }
      },
    };
    const own = await mkdtemp(join(folder, "half-"));
    await expect(writeFitsIdi(broken, join(own, "half.idifits"))).rejects.toThrow("the disk has gone");
    expect(await readdir(own)).toEqual([]);
  });

  it("refuses what the format cannot hold", async () => {
    const refused = async (dataset: Dataset, message: RegExp) => {
      const path = join(folder, "never.idifits");
      await expect(writeFitsIdi(dataset, path)).rejects.toThrow(message);
      expect(await readdir(folder)).not.toContain("never.idifits");
    };
    await refused(
      simulated({ ...small, polarizations: ["RR", "LL", "LR"] }).dataset,
      /evenly spaced Stokes codes/,
    );
    const gaps = setup(1, 1.4e9, 1e6);
    gaps.frequencies[2]! += 1e6;
    await refused(
      { ...mixed(), setups: [gaps, gaps, gaps] },
      /channel 2 of sub-band 0 is 1000000 Hz off the grid of its channel widths, expected evenly spaced channels/,
    );
    const many = memoryDataset({ rows: [{ time: 60_000, antenna1: 1, antenna2: 3000 }] });
    await refused(many, /antenna number 3000, expected 2047 at most/);
  });
});
