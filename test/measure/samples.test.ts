/** What a sample is, and the sums and counts that follow from it, on rows written out by hand. */
import { describe, expect, it } from "vitest";
import { surveyDataset } from "../../src/measure/survey.ts";
import type { Survey } from "../../src/measure/survey-result.ts";
import { gridRows, type MemorySample, memoryDataset, START } from "../support/memory-dataset.ts";

const PAIR = [{ time: START, antenna1: 1, antenna2: 2, u: 3e-7, v: -2e-7, w: 1e-7 }];

function one(samples: readonly MemorySample[]): Promise<Survey> {
  return surveyDataset(
    memoryDataset({
      rows: PAIR,
      channels: samples.length,
      sample: (_row, _subband, channel) => samples[channel]!,
    }),
  );
}

describe("a sample", () => {
  const NAN = Number.NaN;
  const INF = Number.POSITIVE_INFINITY;
  const KINDS: [string, MemorySample, "usable" | "flagged" | "bad" | "zero"][] = [
    ["with a weight", [1, 2, 3], "usable"],
    ["of denormal size", [1e-45, 0, 1], "usable"],
    ["of the largest size", [3e38, 3e38, 1], "usable"],
    ["with a denormal weight", [1, 0, 1e-45], "usable"],
    ["with weight 0", [1, 2, 0], "flagged"],
    ["with weight -0", [1, 2, -0], "flagged"],
    ["with a negative weight", [1, 2, -3], "flagged"],
    ["flagged, whatever its value", [NAN, INF, -1], "flagged"],
    ["flagged and zero", [0, 0, -1], "flagged"],
    ["with weight NaN", [1, 2, NAN], "bad"],
    ["with an infinite weight", [0, 0, INF], "bad"],
    ["with a weight of minus infinity", [1, 2, -INF], "bad"],
    ["with a real part that is no number", [NAN, 0, 1], "bad"],
    ["with an infinite imaginary part", [0, -INF, 1], "bad"],
    ["exactly zero with a weight", [0, 0, 1], "zero"],
    ["zero but for a sign", [-0, 0, 1], "zero"],
  ];
  it.each(KINDS)("%s", async (_, sample, kind) => {
    const { totals, tracks, levels } = await one([sample]);
    expect(totals).toMatchObject({ samples: 1, usable: 0, flagged: 0, bad: 0, zero: 0, [kind]: 1 });
    expect(tracks[kind][0]).toBe(1);
    expect(levels.count[0]).toBe(kind === "usable" ? 1 : 0);
    expect(Number.isNaN(levels.median[0]!)).toBe(kind !== "usable");
  });
});

describe("a track cell", () => {
  it("holds weighted means, sums and the slope product of usable neighbours", async () => {
    const { tracks } = await one([
      [1, 1, 1],
      [3, -1, 3],
      [9, 9, -1],
      [0, 2, 2],
    ]);
    expect(tracks.weight[0]).toBe(6);
    expect(tracks.real[0]).toBeCloseTo((1 + 9 + 0) / 6, 6);
    expect(tracks.imag[0]).toBeCloseTo((1 - 3 + 4) / 6, 6);
    expect(tracks.amplitude[0]).toBeCloseTo((Math.SQRT2 + Math.sqrt(10) + 2) / 3, 6);
    // Channels 0 and 1 alone are neighbours: (3 - i)(1 - i) = 2 - 4i.
    expect(tracks.slopeReal[0]).toBeCloseTo(2, 6);
    expect(tracks.slopeImag[0]).toBeCloseTo(-4, 6);
    expect([tracks.usable[0], tracks.flagged[0]]).toEqual([3, 1]);
  });

  it("of nothing usable holds NaN and a weight of 0", async () => {
    const { tracks, antennasWithData, measures } = await one([[1, 1, -1]]);
    expect(tracks.real[0]).toBeNaN();
    expect(tracks.amplitude[0]).toBeNaN();
    expect(tracks.weight[0]).toBe(0);
    expect(antennasWithData).toEqual([]);
    expect(measures.get("dataset")!.table.get("flagged_fraction", 0)).toBe(1);
  });

  it("is conjugated, u, v, w negated, where the higher antenna is stored first", async () => {
    const samples: MemorySample[] = [
      [1, 1, 1],
      [3, -1, 3],
    ];
    const straight = (await one(samples)).tracks;
    const swapped = await surveyDataset(
      memoryDataset({
        rows: PAIR.map((row) => ({ ...row, antenna1: 2, antenna2: 1 })),
        channels: 2,
        sample: (_row, _subband, channel) => samples[channel]!,
      }),
    );
    expect(swapped.baselines).toEqual([{ antenna1: 1, antenna2: 2 }]);
    const { tracks } = swapped;
    expect([tracks.u[0], tracks.v[0], tracks.w[0]]).toEqual([
      -straight.u[0]!,
      -straight.v[0]!,
      -straight.w[0]!,
    ]);
    expect([tracks.real[0], tracks.imag[0]]).toEqual([straight.real[0], -straight.imag[0]!]);
    expect([tracks.slopeReal[0], tracks.slopeImag[0]]).toEqual([
      straight.slopeReal[0],
      -straight.slopeImag[0]!,
    ]);
  });

  it("stands under its sub-band and polarization, the polarization fastest", async () => {
    const { tracks, levels } = await surveyDataset(
      memoryDataset({
        rows: PAIR,
        subbands: 2,
        channels: 3,
        polarizations: ["RR", "LL"],
        sample: (_row, s, c, p) => [100 * s + 10 * c + p + 1, 0, 1],
      }),
    );
    expect([...tracks.amplitude]).toEqual([11, 12, 111, 112]);
    for (const [i, expected] of [1, 2, 11, 12, 21, 22, 101, 102, 111, 112, 121, 122].entries()) {
      expect(Math.abs(levels.median[i]! / expected - 1)).toBeLessThan(1 / 64);
    }
  });
});

describe("rows", () => {
  it("of one antenna with itself are counted and otherwise left out", async () => {
    const rows = [...PAIR, { time: START, antenna1: 1, antenna2: 1 }];
    const { totals, tracks, baselines } = await surveyDataset(memoryDataset({ rows }));
    expect(totals).toMatchObject({ rows: 1, autocorrelationRows: 1, samples: 1 });
    expect([tracks.cells, baselines.length]).toEqual([1, 1]);
  });

  it("without a time are counted but have no place in the tracks", async () => {
    const rows = [...PAIR, { ...PAIR[0]!, time: Number.NaN }];
    const { totals, tracks, times } = await surveyDataset(memoryDataset({ rows }));
    expect(totals).toMatchObject({ rows: 2, badTimeRows: 1, samples: 2, usable: 2, outOfOrderRows: 0 });
    expect([tracks.cells, times.length]).toEqual([1, 1]);
  });

  it("without u, v, w are counted and keep their samples", async () => {
    const rows = [...PAIR, { ...PAIR[0]!, time: START + 1e-3, w: Number.NaN }];
    const { totals, tracks } = await surveyDataset(memoryDataset({ rows }));
    expect(totals.badUvwRows).toBe(1);
    expect(tracks.cells).toBe(2);
  });

  it("are sorted by baseline, then time", async () => {
    const rows = gridRows(3, 4).reverse();
    const { tracks, totals } = await surveyDataset(memoryDataset({ rows }));
    expect([...tracks.baseline]).toEqual([0, 0, 0, 0, 1, 1, 1, 1, 2, 2, 2, 2]);
    expect([...tracks.firstCell]).toEqual([0, 4, 8, 12]);
    for (let cell = 1; cell < 4; cell++) expect(tracks.time[cell]!).toBeGreaterThan(tracks.time[cell - 1]!);
    // Three times the clock goes back, at the first row of each integration but the first.
    expect(totals.outOfOrderRows).toBe(3);
  });

  it("of no dataset make a survey of nothing", async () => {
    const { totals, measures, times, scans } = await surveyDataset(memoryDataset({ rows: [] }));
    expect(totals).toMatchObject({ rows: 0, samples: 0 });
    expect([times.length, scans.length]).toEqual([0, 0]);
    expect(measures.get("dataset")!.table.numRows()).toBe(1);
    expect(measures.get("antenna")!.table.numRows()).toBe(0);
  });
});

describe("sensitivity lost", () => {
  const lostOf = async (samples: readonly MemorySample[], polarizations?: readonly ["RR", "RL"]) => {
    const dataset = memoryDataset({
      rows: PAIR,
      channels: samples.length,
      ...(polarizations === undefined ? {} : { polarizations }),
      sample: (_row, _subband, channel, p) => (p === 0 ? samples[channel]! : [0, 0, 0]),
    });
    return (await surveyDataset(dataset)).measures.get("dataset")!.table.get("sensitivity_lost", 0) as number;
  };
  // Natural weighting: noise is 1/sqrt(sum of weights).
  it("is by weight, flagged samples at what they weighed before", async () => {
    expect(
      await lostOf([
        [1, 0, 9],
        [1, 0, -16],
      ]),
    ).toBeCloseTo(1 - Math.sqrt(9 / 25), 12);
  });
  it("takes flagged samples without a weight and bad ones for typical", async () => {
    expect(
      await lostOf([
        [1, 0, 4],
        [1, 0, 2],
        [1, 0, 0],
        [Number.NaN, 0, 1],
      ]),
    ).toBeCloseTo(1 - Math.SQRT1_2, 12);
  });
  it("leaves out the cross hands", async () => {
    expect(await lostOf([[1, 0, 4]], ["RR", "RL"])).toBe(0);
  });
});
