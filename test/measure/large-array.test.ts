import { describe, expect, it } from "vitest";
import { detect } from "../../src/detect/detect.ts";
import { evenChoice, MOST_BASELINES } from "../../src/measure/even-choice.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { largeArray } from "../support/large-array.ts";

const SIGNAL = 3;

describe("an array of 260 antennas", () => {
  it("is surveyed and looked through, every baseline of it", async () => {
    const dataset = largeArray({ antennas: 260, integrations: 1, channels: 2 });
    const survey = await surveyDataset(dataset);
    expect(survey.baselines).toHaveLength((260 * 259) / 2);
    expect(survey.measures.get("baseline")!.table.numRows()).toBe((260 * 259) / 2);
    expect(survey.antennasWithData).toHaveLength(260);
    expect(survey.totals).toMatchObject({ rows: 33_670, usable: 67_340, duplicateRows: 0 });
    expect(await detect(survey, { purpose: "continuum", lineChannels: [] })).toEqual([]);
  });

  it("names a silent antenna in two integrations, of which no baseline alone could tell its noise", async () => {
    const dataset = largeArray({ antennas: 120, integrations: 2, channels: 4, silent: [7] });
    const found = await detect(await surveyDataset(dataset), { purpose: "continuum", lineChannels: [] });
    expect(found.map(({ kind, scope }) => [kind, scope.antennas])).toEqual([["silent-antenna", [7]]]);
  });

  it("keeps its levels where antennas own the sketches, that is, where memory holds none a baseline", async () => {
    const dataset = largeArray({ antennas: 60, integrations: 40, channels: 4, silent: [7] });
    const shared = await surveyDataset(dataset, { memory: 4e6 });
    const own = await surveyDataset(dataset);
    const level = (survey: typeof own, antenna: number) => {
      const { table } = survey.measures.get("antenna")!;
      return Number(table.get("amplitude_median", antenna - 1));
    };
    // A point source of 3 Jy and noise of 1 Jy a part: sqrt(9 + 1) by the Rice distribution, near enough.
    for (const survey of [shared, own]) expect(level(survey, 20)).toBeCloseTo(Math.hypot(SIGNAL, 1), 0);
    expect(level(shared, 20) / level(own, 20)).toBeCloseTo(1, 1);
    expect(level(shared, 7)).toBeLessThan(0.7 * level(shared, 20));
    // Noise: the same of every antenna, with fringes or without.
    const noise = (survey: typeof own) => Number(survey.measures.get("dataset")!.table.get("noise_sigma", 0));
    expect(noise(shared) / noise(own)).toBeCloseTo(1, 1);
  });
});

describe("evenChoice", () => {
  const allBaselines = (antennas: number) =>
    Array.from({ length: antennas }, (_, i) => i + 1).flatMap((antenna1) =>
      Array.from({ length: antennas - antenna1 }, (_, j) => ({ antenna1, antenna2: antenna1 + 1 + j })),
    );

  it("takes all baselines of an array that is not too large", () => {
    expect([...evenChoice(allBaselines(20))]).toEqual(Array.from({ length: 190 }, (_, b) => b));
  });

  it("leaves each of 1000 antennas enough of its own", () => {
    const baselines = allBaselines(1000);
    const chosen = evenChoice(baselines);
    expect(chosen.length).toBeLessThanOrEqual(MOST_BASELINES);
    expect(chosen.length).toBeGreaterThan(0.85 * MOST_BASELINES);
    const own = new Int32Array(1001);
    for (const b of chosen) {
      own[baselines[b]!.antenna1]! += 1;
      own[baselines[b]!.antenna2]! += 1;
    }
    // 119 on the average; a binomial of 999 at 0.06 has a deviation of 10.
    expect(Math.min(...own.subarray(1))).toBeGreaterThan(60);
    expect(Math.max(...own)).toBeLessThan(190);
  });
});
