import { rmSync } from "node:fs";
import fc from "fast-check";
import { afterAll, describe, expect, it } from "vitest";
import { openColumnar } from "../../../src/dataset/columnar/open.ts";
import type { Dataset, SampleBlock } from "../../../src/dataset/dataset.ts";
import { readAll } from "../../support/read-all.ts";
import { csvOf, folder, gridSamples, type TestSample, tableFile } from "./table-text.ts";

afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** Samples by what they are of, whatever the order of the rows. */
async function samplesOf(dataset: Dataset): Promise<Map<string, number[]>> {
  const all = await readAll(dataset);
  const { channels, polarizations } = dataset.shape;
  const found = new Map<string, number[]>();
  for (let row = 0; row < all.rows; row++) {
    for (let i = 0; i < channels * polarizations; i++) {
      const at = row * channels * polarizations + i;
      const key = [
        all.time[row],
        all.antenna1[row],
        all.antenna2[row],
        Math.floor(i / polarizations),
        dataset.polarizations[i % polarizations],
      ].join(" ");
      found.set(key, [all.real[at]!, all.imag[at]!, all.weight[at]!]);
    }
  }
  return found;
}

function expected(samples: readonly TestSample[]): Map<string, number[]> {
  return new Map(
    samples.map(({ time, a1, a2, channel, pol, re, im, weight }) => [
      [time, a1, a2, channel, pol].join(" "),
      [re, im, weight],
    ]),
  );
}

const samples = gridSamples(4, 3, 5);

describe("The order of samples in a table", () => {
  const orders: [string, (a: TestSample, b: TestSample) => number][] = [
    ["baseline by baseline", () => 0],
    ["channel by channel", (a, b) => a.channel - b.channel],
    ["polarization by polarization", (a, b) => (a.pol < b.pol ? -1 : a.pol > b.pol ? 1 : 0)],
    ["antenna by antenna", (a, b) => a.a1 - b.a1 || a.a2 - b.a2],
    ["backwards in time", (a, b) => b.time - a.time],
  ];
  it.each(orders)("does not matter: %s", async (_, order) => {
    const dataset = await openColumnar([tableFile(csvOf([...samples].sort(order)))]);
    expect(dataset.rows).toBe(18);
    expect(dataset.shape).toEqual({ subbands: 1, channels: 5, polarizations: 2 });
    expect(await samplesOf(dataset)).toEqual(expected(samples));
  });

  it("does not matter when it is any order at all", async () => {
    await fc.assert(
      fc.asyncProperty(fc.shuffledSubarray(samples, { minLength: samples.length }), async (shuffled) => {
        const dataset = await openColumnar([tableFile(csvOf(shuffled))]);
        expect(await samplesOf(dataset)).toEqual(expected(samples));
      }),
      { numRuns: 8 },
    );
  });

  it("is kept where the rows come one after another", async () => {
    const all = await readAll(await openColumnar([tableFile(csvOf(samples))]));
    expect([...all.antenna1].slice(0, 6)).toEqual([1, 1, 1, 2, 2, 3]);
    expect([...all.antenna2].slice(0, 6)).toEqual([2, 3, 4, 3, 4, 4]);
    expect([...all.real].slice(0, 3)).toEqual([0.25, 1.25, 2.25]);
  });
});

describe("Ranges of rows and sizes of blocks", () => {
  it("give the same bytes", async () => {
    const dataset = await openColumnar([tableFile(csvOf(samples))]);
    const whole = await readAll(dataset);
    const size = 10;
    await fc.assert(
      fc.asyncProperty(
        fc.nat(18),
        fc.nat(18),
        fc.integer({ min: 1, max: 20 }),
        fc.constantFrom("rows", "weights", "samples"),
        async (one, other, blockRows, want) => {
          const rows: [number, number] = [Math.min(one, other), Math.max(one, other)];
          const part = await readAll(dataset, { rows, blockRows, want: want as "rows" });
          const cut = (key: keyof SampleBlock & ("time" | "u" | "weight" | "real")) => {
            const each = key === "time" || key === "u" ? 1 : size;
            const column = whole[key].subarray(rows[0] * each, rows[1] * each);
            return want === "rows" && each > 1 ? [] : want === "weights" && key === "real" ? [] : [...column];
          };
          for (const key of ["time", "u", "weight", "real"] as const)
            expect([...part[key]]).toEqual(cut(key));
        },
      ),
      { numRuns: 40 },
    );
  });

  it("that make no sense are refused", async () => {
    const dataset = await openColumnar([tableFile(csvOf(samples))]);
    await expect(readAll(dataset, { rows: [3, 19] })).rejects.toThrow("the dataset has 18");
    await expect(readAll(dataset, { blockRows: 0 })).rejects.toThrow("1 or more");
  });
});

describe("Several files", () => {
  it("are one table", async () => {
    const half = samples.length / 2 + 3;
    const files = [samples.slice(0, half), samples.slice(half)].map((part) => tableFile(csvOf(part)));
    const dataset = await openColumnar(files);
    expect(dataset.files).toEqual(files);
    expect(await samplesOf(dataset)).toEqual(expected(samples));
  });

  it("of different columns are refused", async () => {
    const other = csvOf(samples).replace("weight", "wt");
    const promise = openColumnar([tableFile(csvOf(samples)), tableFile(other)]);
    await expect(promise).rejects.toThrow('there is no column "weight"');
  });
});

describe("Samples that are not as they should be", () => {
  it("and never came are flagged, and counted", async () => {
    const dataset = await openColumnar([tableFile(csvOf(samples.filter((_, i) => i !== 7 && i !== 100)))]);
    const weights = (await readAll(dataset)).weight;
    expect([...weights].filter((weight) => weight === 0)).toHaveLength(2);
    expect(weights[7]).toBe(0);
    expect(dataset.notes.map(({ text }) => text).join()).toContain("2 of 180 samples are not in the table");
  });

  it("and come twice count once, the first time", async () => {
    const again = { ...samples[7]!, re: 999 };
    const dataset = await openColumnar([tableFile(csvOf([...samples, again]))]);
    expect((await readAll(dataset)).real[7]).toBe(samples[7]!.re);
    expect(dataset.notes.find(({ code }) => code === "samples-twice")?.kind).toBe("fault");
  });

  it("and are empty are flagged; what is not a number stays so", async () => {
    const lines = csvOf(samples).split("\n");
    lines[1] = lines[1]!.replace(/0.25,-0.25,[^,]*$/, ",-0.25,1");
    lines[2] = lines[2]!.replace("1.25,", "NaN,");
    lines[3] = lines[3]!.replace(/,[^,]*$/, ",");
    const dataset = await openColumnar([tableFile(lines.join("\n"))]);
    const all = await readAll(dataset);
    expect([all.real[0], all.weight[0]]).toEqual([0, 0]);
    expect([all.real[1], all.weight[1]]).toEqual([Number.NaN, samples[1]!.weight]);
    expect(all.weight[2]).toBe(0);
    expect(dataset.notes.map(({ text }) => text).join()).toContain("2 samples have no value or no weight");
  });

  it("and have other u, v, w than their row are named", async () => {
    const lines = csvOf(samples).split("\n");
    lines[4] = lines[4]!.replace(",100,", ",101,");
    const dataset = await openColumnar([tableFile(lines.join("\n"))]);
    expect(dataset.notes.find(({ code }) => code === "uvw-disagree")?.text).toContain(
      "1 samples have other u",
    );
  });
});
