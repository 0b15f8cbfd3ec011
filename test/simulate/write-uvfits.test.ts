import { spawnSync } from "node:child_process";
import { mkdtemp, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { type UvfitsOptions, writeUvfits } from "../../src/simulate/write-uvfits.ts";
import { InputError } from "../../src/util/errors.ts";
import { readAll, sameBits } from "../support/read-all.ts";
import { systemTool } from "../support/require.ts";
import { CLEAN, FAULTY, simulated } from "../support/scenarios.ts";

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-uvfits-"));
});
afterAll(() => rm(folder, { recursive: true, force: true }));

const small = { time: { duration: "3min" } } as const;

/** Every kind of dataset and variant that a file may hold. */
const CASES: readonly (readonly [string, () => Dataset, UvfitsOptions])[] = [
  ["circular", () => CLEAN.circular().dataset, {}],
  ["linear", () => simulated({ ...small, polarizations: ["XX", "YY", "XY", "YX"] }).dataset, {}],
  ["stokes", () => simulated({ ...small, polarizations: ["I", "Q", "U", "V"] }).dataset, {}],
  ["one product", () => simulated({ ...small, polarizations: ["LL"] }).dataset, {}],
  ["in reverse order", () => simulated({ ...small, polarizations: ["LL", "RR"] }).dataset, {}],
  ["fields", () => CLEAN.fieldsAndGaps().dataset, {}],
  ["descending", () => simulated({ ...small, frequency: { descending: true, subbands: 3 } }).dataset, {}],
  ["local frame", () => simulated({ ...small, array: { frame: "local" } }).dataset, {}],
  [
    "spaced sub-bands",
    () => simulated({ ...small, frequency: { subbands: 2, spacing: "50MHz" } }).dataset,
    {},
  ],
  ["faults", () => FAULTY.notFinite().dataset, {}],
  ["flags", () => FAULTY.flaggedChannels().dataset, {}],
  ["autocorrelations", () => simulated({ ...small, autocorrelations: true }).dataset, {}],
  ["no sub-band axis", () => simulated(small).dataset, { subbandAxis: false }],
  ["double precision", () => simulated(small).dataset, { bitpix: -64 }],
  ["wide baseline codes", () => simulated(small).dataset, { baseline: "2048" }],
  ["antenna parameters", () => simulated(small).dataset, { baseline: "antennas" }],
  ["a source table for one field", () => simulated(small).dataset, { sources: true }],
];

describe("a written file", () => {
  it.each(CASES)("of %s reads back as the dataset it was written from", async (name, make, options) => {
    const dataset = make();
    const path = join(folder, `${name}.uvfits`);
    await writeUvfits(dataset, path, options);
    const read = await openDataset(path);
    expect(read.shape).toEqual(dataset.shape);
    expect(read.polarizations).toEqual(dataset.polarizations);
    expect(read.rows).toBe(dataset.rows);
    expect(read.setups).toEqual(dataset.setups);
    expect(read.unit).toBe(dataset.unit);
    expect(read.array).toEqual(dataset.array);
    expect(read.fields).toHaveLength(dataset.fields.length);
    read.fields.forEach((field, i) => {
      const own = dataset.fields[i]!;
      expect([field.id, field.name, field.equinox]).toEqual([own.id, own.name, own.equinox]);
      // Degrees and back: the last bit.
      expect(field.rightAscension).toBeCloseTo(own.rightAscension, 14);
      expect(field.declination).toBeCloseTo(own.declination, 14);
    });
    const [ours, theirs] = [await readAll(dataset), await readAll(read)];
    for (const column of ["real", "imag", "weight", "time", "u", "v", "w", "integration"] as const) {
      expect(sameBits(theirs[column], ours[column]), column).toBe(true);
    }
    for (const column of ["antenna1", "antenna2", "subarray", "field", "setup"] as const) {
      expect(Buffer.from(theirs[column].buffer).equals(Buffer.from(ours[column].buffer)), column).toBe(true);
    }
  });

  it("may hold u, v, w in wavelengths with the scale that makes them seconds", async () => {
    const { dataset } = simulated(small);
    const path = join(folder, "wavelengths.uvfits");
    await writeUvfits(dataset, path, { uvw: "wavelengths" });
    const [ours, theirs] = [await readAll(dataset), await readAll(await openDataset(path))];
    // Rounded to single precision once more.
    theirs.u.forEach((u, row) => {
      expect(Math.abs(u - ours.u[row]!)).toBeLessThan(2 ** -23 * Math.abs(ours.u[row]!));
    });
  });

  const fitsverify = systemTool("fitsverify");
  it.skipIf(fitsverify === undefined).each(CASES)("of %s passes fitsverify", async (name, make, options) => {
    const path = join(folder, `${name}.uvfits`);
    await writeUvfits(make(), path, { ...options, overwrite: true });
    const { stdout } = spawnSync(fitsverify!, [path], { encoding: "utf8" });
    expect(stdout).toMatch(/\d+ warning\(s\) and 0 error\(s\)/);
    // The format's own ways, which the verifier warns of: NAXIS1 = 0 has no CTYPE1, column names hold spaces and dots.
    const warnings = stdout.split("\n").filter((line) => line.includes("*** Warning:"));
    const ours = warnings.filter((line) => !/keywords appear to be missing|contains character/.test(line));
    expect(ours).toEqual([]);
  });
});

describe("writing", () => {
  it("refuses to overwrite, and leaves what is there", async () => {
    const path = join(folder, "there.uvfits");
    await writeFile(path, "mine");
    await expect(writeUvfits(simulated(small).dataset, path)).rejects.toThrow(InputError);
    expect(await readFile(path, "utf8")).toBe("mine");
  });

  it("leaves nothing behind when it fails halfway", async () => {
    const { dataset } = simulated(small);
    const broken: Dataset = {
      ...dataset,
      async *blocks(request) {
        let given = 0;
        for await (const block of dataset.blocks({ ...request, blockRows: 10 })) {
          if (given++ > 3) throw new Error("the disk has gone");
          yield block;
        }
      },
    };
    const own = await mkdtemp(join(folder, "half-"));
    await expect(writeUvfits(broken, join(own, "half.uvfits"))).rejects.toThrow("the disk has gone");
    expect(await readdir(own)).toEqual([]);
  });

  it("tells how far it is", async () => {
    const done: number[] = [];
    const { dataset } = simulated(small);
    await writeUvfits(dataset, join(folder, "told.uvfits"), { onRows: (rows) => done.push(rows) });
    expect(done.at(-1)).toBe(dataset.rows);
  });

  it("refuses what the format cannot hold", async () => {
    const refused = async (dataset: Dataset, options: UvfitsOptions, message: RegExp) => {
      const path = join(folder, "never.uvfits");
      await expect(writeUvfits(dataset, path, options)).rejects.toThrow(message);
      expect(await readdir(folder)).not.toContain("never.uvfits");
    };
    const two = simulated({ ...small, frequency: { subbands: 2 } }).dataset;
    await refused(two, { subbandAxis: false }, /no sub-band axis for 2 sub-bands/);
    const uneven = simulated({ ...small, polarizations: ["RR", "LL", "LR"] }).dataset;
    await refused(uneven, {}, /evenly spaced Stokes codes/);
    const layout = { kind: "ring", antennas: 3, radius: "100m" } as const;
    const large = simulated({ ...small, array: { layout, numbers: [1, 2, 300] } }).dataset;
    await refused(large, { baseline: "256" }, /antenna number 300 in a 256 code/);
    await refused(CLEAN.fieldsAndGaps().dataset, { sources: false }, /no source table/);
  });
});
