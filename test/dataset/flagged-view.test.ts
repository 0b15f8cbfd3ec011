import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { countSelections, flaggedView } from "../../src/dataset/flagged-view.ts";
import { EVERYTHING, type Selection } from "../../src/dataset/selection.ts";
import { type MemoryRow, type MemoryShape, memoryDataset, weightsOf } from "./memory-dataset.ts";

const SHAPE: MemoryShape = { subbands: 2, channels: 3, polarizations: ["XX", "YY"] };
const SIZE = 12;

/** Three antennas and an autocorrelation, two integrations, all weights 2. */
function rows(weight = 2): MemoryRow[] {
  const pairs = [
    [1, 2],
    [1, 3],
    [3, 2],
    [2, 2],
  ] as const;
  return [60000, 60000.5].flatMap((time, i) =>
    pairs.map(([antenna1, antenna2]) => ({
      time,
      antenna1,
      antenna2,
      field: i + 1,
      weight: new Array<number>(SIZE).fill(weight),
    })),
  );
}

async function flaggedAt(selection: Partial<Selection>): Promise<number[]> {
  const weights = await weightsOf(
    flaggedView(memoryDataset(SHAPE, rows()), [{ ...EVERYTHING, ...selection }]),
  );
  return weights.flatMap((weight, at) => (weight < 0 ? [at] : []));
}

const rowsOf = (samples: readonly number[]) => [...new Set(samples.map((at) => Math.floor(at / SIZE)))];

describe("flaggedView", () => {
  it("takes every sample when no part narrows the selection", async () => {
    expect(await flaggedAt({})).toHaveLength(8 * SIZE);
  });

  it("takes every baseline to a named antenna, whichever end it is, and its autocorrelation", async () => {
    expect(rowsOf(await flaggedAt({ antennas: [2] }))).toEqual([0, 2, 3, 4, 6, 7]);
  });

  it("takes a named baseline either way round", async () => {
    expect(rowsOf(await flaggedAt({ baselines: [[2, 3]] }))).toEqual([2, 6]);
    expect(rowsOf(await flaggedAt({ baselines: [[3, 2]] }))).toEqual([2, 6]);
  });

  it("includes both ends of a time range and no row beside it", async () => {
    expect(rowsOf(await flaggedAt({ time: [60000.5, 60000.5] }))).toEqual([4, 5, 6, 7]);
    expect(await flaggedAt({ time: [60000.0001, 60000.4] })).toEqual([]);
  });

  it("takes the AND of the parts", async () => {
    const samples = await flaggedAt({
      antennas: [1],
      fields: [1],
      subbands: [1],
      channels: [[1, 1]],
      polarizations: ["YY"],
    });
    // Sample 9 of a row: sub-band 1, channel 1, second product.
    expect(samples).toEqual([9, SIZE + 9]);
  });

  it.each(["antennas", "baselines", "subbands", "channels", "polarizations", "fields"] as const)(
    "takes nothing when %s is an empty list",
    async (part) => {
      expect(await flaggedAt({ [part]: [] })).toEqual([]);
    },
  );

  it("takes nothing of what the dataset does not have", async () => {
    expect(await flaggedAt({ subbands: [7] })).toEqual([]);
    expect(await flaggedAt({ channels: [[3, 9]] })).toEqual([]);
    expect(await flaggedAt({ polarizations: ["RR"] })).toEqual([]);
    expect(await flaggedAt({ antennas: [99] })).toEqual([]);
  });

  it("leaves weights that are zero, negative or not finite as they are", async () => {
    const odd = [0, -3, Number.NaN, Number.POSITIVE_INFINITY, 5, 1, 1, 1, 1, 1, 1, 1];
    const dataset = memoryDataset(SHAPE, [{ time: 1, antenna1: 1, antenna2: 2, weight: odd }]);
    const weights = await weightsOf(flaggedView(dataset, [EVERYTHING]));
    expect(weights.slice(0, 5)).toEqual([0, -3, Number.NaN, Number.POSITIVE_INFINITY, -5]);
    expect(Object.is(weights[0], 0)).toBe(true);
  });

  it("does not match a row without a time to a selection that names one", async () => {
    const dataset = memoryDataset(SHAPE, [{ ...rows()[0]!, time: Number.NaN }]);
    const timed = { ...EVERYTHING, time: [-1e9, 1e9] } as const;
    expect(Math.min(...(await weightsOf(flaggedView(dataset, [timed]))))).toBe(2);
    expect(Math.max(...(await weightsOf(flaggedView(dataset, [EVERYTHING]))))).toBe(-2);
  });

  it("does not change the dataset that it views", async () => {
    const dataset = memoryDataset(SHAPE, rows());
    await weightsOf(flaggedView(dataset, [EVERYTHING]));
    expect(new Set(await weightsOf(dataset))).toEqual(new Set([2]));
  });
});

const selection = fc.record({
  antennas: fc.option(fc.subarray([1, 2, 3])),
  baselines: fc.option(
    fc.array(fc.constantFrom<[number, number]>([1, 2], [2, 3], [3, 1], [2, 2]), { maxLength: 3 }),
  ),
  time: fc.option(fc.constantFrom<[number, number]>([60000, 60000], [60000, 60000.5], [60000.2, 60001])),
  subbands: fc.option(fc.subarray([0, 1])),
  channels: fc.option(fc.array(fc.constantFrom<[number, number]>([0, 0], [1, 2], [0, 2]), { maxLength: 2 })),
  polarizations: fc.option(fc.subarray<"XX" | "YY">(["XX", "YY"])),
  fields: fc.option(fc.subarray([1, 2])),
});

/** A second, plain implementation: one sample asked at a time. */
function takes(s: Selection, row: MemoryRow, offset: number): boolean {
  const p = SHAPE.polarizations[offset % 2]!;
  const channel = Math.floor(offset / 2) % 3;
  const subband = Math.floor(offset / 6);
  const pair = [row.antenna1, row.antenna2];
  return (
    (s.antennas === null || s.antennas.some((a) => pair.includes(a))) &&
    (s.baselines === null ||
      s.baselines.some(([a, b]) => (pair[0] === a && pair[1] === b) || (pair[0] === b && pair[1] === a))) &&
    (s.time === null || (row.time >= s.time[0] && row.time <= s.time[1])) &&
    (s.subbands === null || s.subbands.includes(subband)) &&
    (s.channels === null || s.channels.some(([low, high]) => channel >= low && channel <= high)) &&
    (s.polarizations === null || s.polarizations.includes(p)) &&
    (s.fields === null || s.fields.includes(row.field ?? 1))
  );
}

describe("countSelections", () => {
  it("counts what one sample at a time would, whatever the block size", async () => {
    const weighted = rows().map((row, r) => ({
      ...row,
      weight: row.weight.map((_, i) => [1, 0, -2, 0.37, Number.POSITIVE_INFINITY, 3][(i + r) % 6]!),
    }));
    const usable = (weight: number) => weight > 0 && Number.isFinite(weight);
    await fc.assert(
      fc.asyncProperty(
        fc.array(selection, { maxLength: 4 }),
        fc.integer({ min: 1, max: 9 }),
        async (list, block) => {
          const counts = await countSelections(memoryDataset(SHAPE, weighted, block), list);
          const before = new Set<number>();
          for (const [i, one] of list.entries()) {
            let samples = 0;
            let unflagged = 0;
            let fresh = 0;
            let weight = 0;
            for (const [r, row] of weighted.entries()) {
              for (let offset = 0; offset < SIZE; offset++) {
                if (!takes(one, row, offset)) continue;
                samples += 1;
                if (!usable(row.weight[offset]!)) continue;
                unflagged += 1;
                if (row.antenna1 !== row.antenna2) weight += row.weight[offset]!;
                if (!before.has(r * SIZE + offset)) fresh += 1;
                before.add(r * SIZE + offset);
              }
            }
            expect(counts.each[i]).toMatchObject({ samples, unflagged, fresh });
            // Row sums are rounded to 2^-16 of the first weight, 1 here.
            expect(Math.abs(counts.each[i]!.weight - weight)).toBeLessThan(8 * 2 ** -17);
          }
          expect(counts.union.unflagged).toBe(before.size);
          expect(counts.total.samples).toBe(8 * SIZE);
        },
      ),
      { numRuns: 200 },
    );
  });

  it("counts nothing where the dataset has no rows", async () => {
    const counts = await countSelections(memoryDataset(SHAPE, []), [EVERYTHING]);
    expect(counts.each).toEqual([{ samples: 0, unflagged: 0, fresh: 0, weight: 0 }]);
    expect(counts.total.samples).toBe(0);
  });

  it("finds no sample left unflagged in the flagged view of the same selections", async () => {
    await fc.assert(
      fc.asyncProperty(fc.array(selection, { minLength: 1, maxLength: 4 }), async (list) => {
        const view = flaggedView(memoryDataset(SHAPE, rows()), list);
        const counts = await countSelections(view, list);
        expect(counts.union.unflagged).toBe(0);
        expect(counts.each.every((count) => count.unflagged === 0 && count.weight === 0)).toBe(true);
      }),
      { numRuns: 100 },
    );
  });
});
