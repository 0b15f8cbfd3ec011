/** Random selections over a small dataset, and which samples they take, found one sample at a time. */
import fc from "fast-check";
import { countSelections, flaggedView } from "../../src/dataset/flagged-view.ts";
import type { Selection } from "../../src/dataset/selection.ts";
import { type MemoryRow, memoryDataset, weightsOf } from "../dataset/memory-dataset.ts";

export const TIMES = Float64Array.from([60000, 60000.25, 60000.5, 60000.75]);

const PAIRS = [
  [1, 2],
  [1, 3],
  [2, 3],
] as const;

export const ROWS: readonly MemoryRow[] = [...TIMES].flatMap((time) =>
  PAIRS.map(([antenna1, antenna2]) => ({
    time,
    antenna1,
    antenna2,
    weight: new Array<number>(16).fill(1),
  })),
);

export const DATASET = memoryDataset({ subbands: 2, channels: 4, polarizations: ["XX", "YY"] }, ROWS, 5);

const time = fc
  .tuple(fc.integer({ min: 0, max: 3 }), fc.integer({ min: 0, max: 3 }))
  .map(([a, b]): [number, number] => {
    return [TIMES[Math.min(a, b)]!, TIMES[Math.max(a, b)]!];
  });

const channel = fc
  .tuple(fc.integer({ min: 0, max: 3 }), fc.integer({ min: 0, max: 3 }))
  .map(([a, b]): [number, number] => {
    return [Math.min(a, b), Math.max(a, b)];
  });

export const selection: fc.Arbitrary<Selection> = fc.record({
  antennas: fc.option(fc.subarray([1, 2, 3], { minLength: 1 }), { freq: 1 }),
  baselines: fc.option(
    fc.subarray<[number, number]>(
      [
        [1, 2],
        [3, 1],
        [2, 3],
      ],
      { minLength: 1 },
    ),
    { freq: 1 },
  ),
  time: fc.option(time),
  subbands: fc.option(fc.subarray([0, 1], { minLength: 1 })),
  channels: fc.option(fc.array(channel, { minLength: 1, maxLength: 2 })),
  polarizations: fc.option(fc.subarray<"XX" | "YY">(["XX", "YY"], { minLength: 1 })),
  fields: fc.constant(null),
});

/** Offsets of the samples that any of the selections takes. */
export async function samplesOf(selections: readonly Selection[]): Promise<number[]> {
  const weights = await weightsOf(flaggedView(DATASET, selections));
  return weights.flatMap((weight, at) => (weight < 0 ? [at] : []));
}

export async function unflagged(selections: readonly Selection[]): Promise<number> {
  return (await countSelections(DATASET, selections)).union.unflagged;
}
