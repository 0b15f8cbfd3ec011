/** Flags written into every format and read back: the samples selected are exactly the same. */
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import fc from "fast-check";
import { afterAll, describe, expect, it } from "vitest";
import { CannotHoldFlags } from "../../src/dataset/cannot-hold.ts";
import { flaggedView } from "../../src/dataset/flagged-view.ts";
import type { Selection } from "../../src/dataset/selection.ts";
import type { FlagEntry } from "../../src/flags/entry.ts";
import { readFlags } from "../../src/flags/read-flags.ts";
import { type FlagFormat, flagBytes } from "../../src/report/write-flags.ts";
import { type MemoryRow, memoryDataset, weightsOf } from "../dataset/memory-dataset.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-exports-"));
afterAll(() => rmSync(folder, { recursive: true }));

const SECOND = 1 / 86400;
const START = 61101.9;
/** Ten seconds apart, over midnight; the last ones 20 ms apart. */
const TIMES = Float64Array.from([0, 10, 20, 8650, 8660, 8660.02, 8660.04], (s) => START + s * SECOND);
const ROWS: readonly MemoryRow[] = [...TIMES].flatMap((time, i) =>
  [
    [1, 2],
    [1, 3],
    [3, 2],
    [2, 2],
  ].map(([antenna1, antenna2]) => ({
    time,
    antenna1: antenna1!,
    antenna2: antenna2!,
    field: 1 + (i % 3),
    weight: new Array<number>(3 * 4 * 2).fill(1),
  })),
);
const DATASET = memoryDataset({ subbands: 3, channels: 4, polarizations: ["XX", "YY"] }, ROWS, 5);

const some = <T>(all: readonly T[]) => fc.option(fc.subarray([...all], { minLength: 1 }), { freq: 2 });
const ordered = (most: number) =>
  fc.tuple(fc.nat(most), fc.nat(most)).map(([a, b]): [number, number] => [Math.min(a, b), Math.max(a, b)]);
/** Antennas, channels and fields that the dataset does not have are among them. */
const selection: fc.Arbitrary<Selection> = fc.record({
  antennas: some([1, 2, 3, 9]),
  baselines: some<[number, number]>([
    [1, 2],
    [3, 1],
    [2, 2],
    [9, 1],
  ]),
  // Ends on integrations and between them.
  time: fc.option(
    ordered(2 * TIMES.length - 1).map(([a, b]): [number, number] => {
      const at = (k: number) => TIMES[k >> 1]! + (k % 2) * 0.01 * SECOND;
      return [at(a), at(b)];
    }),
  ),
  subbands: some([0, 1, 2, 7]),
  channels: fc.option(fc.array(ordered(5), { minLength: 1, maxLength: 3 })),
  polarizations: some(["XX", "YY", "XY"] as const),
  fields: some([1, 2, 3, 8]),
});

function entries(selections: readonly Selection[]): FlagEntry[] {
  const unknown = Number.NaN;
  return selections.map((one, i) => ({
    ...one,
    id: `F${i + 1}`,
    rule: "burst",
    reason: 'it said "so", twice\nand more',
    samples: 3,
    fraction: 0.1,
    confidence: 1 / 3,
    cost: {
      sensitivityLossFraction: 0.01,
      beamMajorChangeFraction: unknown,
      beamMinorChangeFraction: unknown,
      peakSidelobeChangeFraction: unknown,
      largestGapChangeFraction: -1e-17,
    },
  }));
}

async function takenBy(selections: readonly Selection[]): Promise<number[]> {
  const weights = await weightsOf(flaggedView(DATASET, selections));
  return weights.flatMap((weight, at) => (weight < 0 ? [at] : []));
}

async function roundTrip(flags: readonly FlagEntry[], format: FlagFormat, times = TIMES) {
  const path = join(folder, `flags.${format}`);
  writeFileSync(path, await flagBytes({ dataset: DATASET, flags, survey: { times } }, format));
  return readFlags(path);
}

describe.each(["csv", "parquet", "idi"] as const)("flags as %s", (format) => {
  it("select exactly the same samples when they are read back, each under its id", async () => {
    await fc.assert(
      fc.asyncProperty(fc.array(selection, { minLength: 1, maxLength: 3 }), async (selections) => {
        const flags = entries(selections);
        const read = await roundTrip(flags, format);
        expect(read.dataset).toBe(DATASET.name);
        for (const flag of flags) {
          const pieces = read.flags.filter(({ id }) => id === flag.id || id.startsWith(`${flag.id}.`));
          expect(await takenBy(pieces)).toEqual(await takenBy([flag]));
        }
      }),
      { numRuns: format === "idi" ? 150 : 60 },
    );
  });
});

describe("flags as tables", () => {
  it.each(["csv", "parquet"] as const)("keep every part to the last bit: %s", async (format) => {
    const flags = entries([
      {
        antennas: [],
        baselines: null,
        time: null,
        subbands: null,
        channels: null,
        polarizations: [],
        fields: [-4],
      },
      {
        antennas: null,
        baselines: [[-1, 7]],
        time: [61101.12345678901, 61101.5],
        subbands: [0],
        channels: [
          [3, 3],
          [0, 1],
        ],
        polarizations: ["RL"],
        fields: null,
      },
    ]);
    expect((await roundTrip(flags, format)).flags).toEqual(flags);
  });

  it.each(["csv", "parquet", "idi"] as const)("may be empty: %s", async (format) => {
    expect((await roundTrip([], format)).flags).toEqual([]);
  });
});

async function lineOf(text: string, name = "hand.csv"): Promise<string> {
  const path = join(folder, name);
  writeFileSync(path, text);
  try {
    await readFlags(path);
  } catch (error) {
    return (error as { line: string }).line.slice(path.length);
  }
  throw new Error("it was let through");
}

describe("a table written by hand", () => {
  const head = "id,antennas,baselines,time_start,time_end,subbands,channels,polarizations,fields";

  it("needs the parts of a selection alone, in any order", async () => {
    const path = join(folder, "few.csv");
    writeFileSync(path, `\ufeff${head},note\r\nmine, 4 7 ,all,,,0;1,"3,5-6",all,all,seen by eye\r\n`);
    const { dataset, flags } = await readFlags(path);
    expect(dataset).toBeNull();
    expect(flags[0]).toMatchObject({
      id: "mine",
      antennas: [4, 7],
      subbands: [0, 1],
      channels: [
        [3, 3],
        [5, 6],
      ],
      time: null,
    });
  });

  it.each([
    [
      "a part left out",
      `${head.replace(",fields", "")}\nF1,all,all,,,all,all,all\n`,
      /line 1: the table of flags has no column fields/,
    ],
    [
      "a misspelt column",
      `${head.replace("channels", "chanels")}\n`,
      /no column channels\. Is "chanels" meant for it\?/,
    ],
    [
      "an empty part",
      `${head}\nF1,,all,,,all,all,all,all\n`,
      /line 2: antennas is empty\. Write "all" where/,
    ],
    [
      "half a time",
      `${head}\nF1,all,all,61000,,all,all,all,all\n`,
      /time_start is 61000 and time_end missing/,
    ],
    [
      "a time that ends before it begins",
      `${head}\nF1,all,all,61001,61000,all,all,all,all\n`,
      /the first not after the second/,
    ],
    [
      "no number",
      `${head}\nF1,all,all,noon,61000,all,all,all,all\n`,
      /time_start is "noon": expected a number/,
    ],
    [
      "a name for an antenna",
      `${head}\nF1,A4,all,,,all,all,all,all\n`,
      /antennas has "A4": expected antenna numbers/,
    ],
    ["a pair of one", `${head}\nF1,all,4,,,all,all,all,all\n`, /baselines has "4": expected pairs/],
    [
      "a range the wrong way",
      `${head}\nF1,all,all,,,all,6-3,all,all\n`,
      /channels has "6-3": expected channels/,
    ],
    [
      "an unknown product",
      `${head}\nF1,all,all,,,all,all,HH,all\n`,
      /polarizations has "HH": expected names among I, Q/,
    ],
    ["no id", `${head}\n,all,all,,,all,all,all,all\n`, /line 2: id is empty/],
    ["a line that is short", `${head}\nF1,all\n`, /line 2: the line has 2 cells: expected 9/],
    ["an open quote", `${head}\n"F1,all\n`, /not a table of flags: /],
  ])("is refused with its line for %s", async (_, text, said) => {
    expect(await lineOf(text)).toMatch(said);
  });

  it("is refused when it is a damaged Parquet or JSON file, or empty", async () => {
    expect(await lineOf("PAR1 and nothing else", "x.parquet")).toMatch(/not a Parquet file that can be read/);
    expect(await lineOf("{", "x.json")).toMatch(/not JSON/);
    expect(await lineOf("", "x.csv")).toMatch(/the table of flags has no column id/);
  });
});

describe("a FLAG table", () => {
  const refusal = async (one: Partial<Selection>, dataset = DATASET) => {
    const everything = {
      antennas: null,
      baselines: null,
      time: null,
      subbands: null,
      channels: null,
      polarizations: null,
      fields: null,
    };
    try {
      await flagBytes(
        { dataset, flags: entries([{ ...everything, ...one }]), survey: { times: TIMES } },
        "idi",
      );
    } catch (error) {
      if (error instanceof CannotHoldFlags) return error.message;
      throw error;
    }
    return null;
  };

  it("says what it cannot hold instead of widening it", async () => {
    expect(await refusal({ antennas: [0] })).toBe(
      "a flag table has no name for antenna 0, whose number there would be 0",
    );
    expect(await refusal({ fields: [0] })).toMatch(/^a flag table has no name for field 0/);
    const mixed = { ...DATASET, polarizations: ["I", "XX"] as const };
    expect(await refusal({}, mixed)).toBe("products I, XX are not of one Stokes family");
  });

  it("names products by their family where they do not follow each other", async () => {
    const apart = memoryDataset({ subbands: 1, channels: 1, polarizations: ["XX", "YX"] }, []);
    const [flag] = entries([
      {
        antennas: null,
        baselines: null,
        time: null,
        subbands: null,
        channels: null,
        polarizations: ["YX"],
        fields: null,
      },
    ]);
    const path = join(folder, "apart.fits");
    writeFileSync(path, await flagBytes({ dataset: apart, flags: [flag!], survey: { times: TIMES } }, "idi"));
    expect((await readFlags(path)).flags[0]!.polarizations).toEqual(["YX"]);
  });
});
