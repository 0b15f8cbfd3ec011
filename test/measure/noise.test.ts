/**
 * Noise from differences, on simulated visibilities whose noise is known: 0.12649 Jy a sample by the radiometer
 * equation, 400/sqrt(2 x 500 kHz x 10 s).
 */
import { describe, expect, it } from "vitest";
import { mixedMedian, runningMedian } from "../../src/measure/channel-noise.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import type { Survey } from "../../src/measure/survey-result.ts";
import { median } from "../../src/util/statistics.ts";
import { gridRows, memoryDataset } from "../support/memory-dataset.ts";
import { FAULTY, simulated, TRAPS } from "../support/scenarios.ts";

const TRUTH = 400 / Math.sqrt(2 * 5e5 * 10);
/** Over 36 baselines of 5000 differences each; what is left is the error of the array's median, three sigma. */
const CLOSE = 0.015;

const sigmaOf = ({ levels }: Survey) => median(levels.sigma);
const column = (survey: Survey, name: string, value: string) =>
  Array.from(survey.measures.get(name)!.table.array(value) as Iterable<number>);

/** Normal numbers, the same every time: Box & Muller 1958 on a linear congruential generator. */
function normals(seed: number): () => number {
  let state = seed;
  const uniform = () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return (state + 0.5) / 2 ** 32;
  };
  return () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform());
}

describe("noise along the channels", () => {
  it.each([
    ["no source at all", []],
    ["1 Jy", [{ flux: "1Jy" }]],
    ["130 Jy, a thousand times the noise", [{ flux: "130Jy" }]],
    ["1300 Jy, ten thousand times", [{ flux: "1300Jy" }]],
    ["130 Jy off the centre, which turns along the channels", [{ flux: "130Jy", east: "10arcmin" }]],
  ])("is that of the samples under %s", async (_, sky) => {
    const survey = await surveyDataset(simulated({ sky }).dataset);
    expect(Math.abs(sigmaOf(survey) / TRUTH - 1)).toBeLessThan(CLOSE);
  });

  it("is that of the samples under a bright double", async () => {
    const survey = await surveyDataset(TRAPS.doubleSource().dataset);
    expect(Math.abs(sigmaOf(survey) / TRUTH - 1)).toBeLessThan(CLOSE);
  });

  it("is not raised by interference that never stops in one channel of sixteen", async () => {
    const survey = await surveyDataset(FAULTY.persistentLine().dataset);
    expect(Math.abs(sigmaOf(survey) / TRUTH - 1)).toBeLessThan(2 * CLOSE);
    // The channel itself keeps the noise of those around it, so that what is in it stands out.
    const { channels, polarizations } = survey.dataset.shape;
    const own = survey.levels.sigma.filter((__, i) => Math.floor(i / polarizations) % channels === 5);
    expect(median(own) / TRUTH).toBeLessThan(1.3);
    // What was measured there is told in the table.
    const ratios = column(survey, "channel", "noise_ratio");
    expect(ratios[5]).toBeGreaterThan(3);
    expect(ratios.indexOf(Math.max(...ratios))).toBe(5);
  });

  it("is not raised by bursts", async () => {
    const survey = await surveyDataset(FAULTY.burst().dataset);
    expect(Math.abs(sigmaOf(survey) / TRUTH - 1)).toBeLessThan(2 * CLOSE);
  });

  it("is a noisy antenna's own", async () => {
    const survey = await surveyDataset(FAULTY.noisyAntenna().dataset);
    const ratios = column(survey, "antenna", "noise_ratio");
    const antennas = column(survey, "antenna", "antenna");
    for (const [i, antenna] of antennas.entries()) {
      expect(Math.abs(ratios[i]! / (antenna === 4 ? 3 : 1) - 1)).toBeLessThan(0.05);
    }
  });

  it("is a noisy channel's own, and not its neighbours'", async () => {
    const random = normals(4);
    const noise = (channel: number) => (channel === 7 ? 3 : 1) * random();
    const survey = await surveyDataset(
      memoryDataset({
        rows: gridRows(5, 200),
        channels: 20,
        sample: (_row, _subband, c) => [10 + noise(c), noise(c), 1],
      }),
    );
    const ratios = column(survey, "channel", "noise_ratio");
    for (const [channel, ratio] of ratios.entries()) {
      expect(Math.abs(ratio / (channel === 7 ? 3 : 1) - 1), `channel ${channel}`).toBeLessThan(0.1);
    }
  });

  it("follows a band whose noise rises towards an edge", async () => {
    const random = normals(5);
    const shape = (c: number) => 1 + 2 * (c / 31) ** 4;
    const survey = await surveyDataset(
      memoryDataset({
        rows: gridRows(5, 300),
        channels: 32,
        sample: (_row, _subband, c) => [shape(c) * random(), shape(c) * random(), 1],
      }),
    );
    for (let c = 0; c < 32; c++) {
      const own = median(survey.levels.sigma.filter((_, i) => i % 32 === c));
      // The outermost channels are told from the next one in.
      expect(Math.abs(own / shape(c) - 1), `channel ${c}`).toBeLessThan(c < 30 ? 0.06 : 0.2);
    }
  });

  // Smoothing by (1/4, 1/2, 1/4) leaves sqrt(3/8) of the noise, and correlates neighbours by 2/3 and 1/6.
  it.each([0, 100])(
    "is that of channels smoothed by 1/4, 1/2, 1/4, under a source of %i sigma",
    async (flux) => {
      const random = normals(6);
      let white: number[] = [];
      const draw = (c: number) => {
        if (c === 0) white = Array.from({ length: 34 }, () => random());
        return white[c]! / 4 + white[c + 1]! / 2 + white[c + 2]! / 4;
      };
      const parts = { re: 0, im: 0 };
      const rows = gridRows(5, 300);
      // Real and imaginary parts from rows of their own.
      const re = rows.map(() => Array.from({ length: 32 }, (_, c) => draw(c)));
      const im = rows.map(() => Array.from({ length: 32 }, (_, c) => draw(c)));
      const survey = await surveyDataset(
        memoryDataset({
          rows,
          channels: 32,
          sample: (row, _subband, c) => [parts.re + flux + re[row]![c]!, parts.im + im[row]![c]!, 1],
        }),
      );
      expect(Math.abs(sigmaOf(survey) / Math.sqrt(3 / 8) - 1)).toBeLessThan(0.02);
    },
  );

  it("does not take a slope of the signal for smoothing", async () => {
    const random = normals(7);
    const survey = await surveyDataset(
      memoryDataset({
        rows: gridRows(5, 300),
        channels: 32,
        // As steep as makes first differences of span 2 grow as smoothed noise does.
        sample: (_row, _subband, c) => [Math.SQRT2 * c + random(), random(), 1],
      }),
    );
    expect(Math.abs(sigmaOf(survey) - 1)).toBeLessThan(0.02);
  });

  it("of two channels is that of their difference", async () => {
    const survey = await surveyDataset(simulated({ frequency: { channels: 2 } }).dataset);
    expect(Math.abs(sigmaOf(survey) / TRUTH - 1)).toBeLessThan(2 * CLOSE);
  });
});

describe("noise in time", () => {
  it("serves where there is one channel", async () => {
    const survey = await surveyDataset(simulated({ frequency: { channels: 1 } }).dataset);
    expect(Math.abs(sigmaOf(survey) / TRUTH - 1)).toBeLessThan(3 * CLOSE);
  });

  it("serves where every other channel is flagged", async () => {
    const random = normals(8);
    const survey = await surveyDataset(
      memoryDataset({
        rows: gridRows(5, 200),
        channels: 8,
        sample: (_row, _subband, c) => [5 + random(), random(), c % 2 === 0 ? 1 : -1],
      }),
    );
    expect(Math.abs(sigmaOf(survey) - 1)).toBeLessThan(0.05);
  });

  it("does not look across scans", async () => {
    const random = normals(9);
    const rows = gridRows(4, 60).map((row, i) => (i < 180 ? row : { ...row, time: row.time + 0.5 }));
    const survey = await surveyDataset(
      memoryDataset({ rows, sample: (row) => [(row < 180 ? 0 : 1e6) + random(), random(), 1] }),
    );
    expect(survey.scans.length).toBe(2);
    expect(Math.abs(sigmaOf(survey) - 1)).toBeLessThan(0.15);
  });
});

describe("noise unknown", () => {
  it("is NaN where nothing can be told from differences", async () => {
    const survey = await surveyDataset(memoryDataset({ rows: gridRows(3, 2) }));
    expect(sigmaOf(survey)).toBeNaN();
  });
  it("is 0 where samples do not differ at all", async () => {
    const survey = await surveyDataset(memoryDataset({ rows: gridRows(3, 20), channels: 8 }));
    expect(sigmaOf(survey)).toBe(0);
  });
});

describe("the median of numbers from several Rayleigh distributions", () => {
  it("is that of all of them together", () => {
    const [sigmas, each] = [[1, 2, 5], 30_001];
    const all = sigmas.flatMap((sigma) =>
      Array.from({ length: each }, (_, i) => sigma * Math.sqrt(-2 * Math.log(1 - (i + 0.5) / each))),
    );
    const medians = Float64Array.from(sigmas, (sigma) => sigma * Math.sqrt(2 * Math.log(2)));
    expect(Math.abs(mixedMedian(medians, Float64Array.of(each, each, each)) / median(all) - 1)).toBeLessThan(
      1e-4,
    );
    expect(mixedMedian(medians, Float64Array.of(0, 7, 0))).toBeCloseTo(medians[1]!, 12);
    expect(mixedMedian(Float64Array.of(0, 0), Float64Array.of(5, 5))).toBe(0);
    expect(mixedMedian(Float64Array.of(Number.NaN), Float64Array.of(5))).toBeNaN();
  });
});

describe("the running median", () => {
  it("leaves a slope as it is, edges too, and takes out what is narrow", () => {
    const slope = Float64Array.from({ length: 21 }, (_, c) => 3 + c);
    const spiked = slope.map((value, c) => (c === 10 || c === 11 ? 100 : value));
    const smooth = runningMedian(spiked, 4);
    for (let c = 1; c < 20; c++) expect(Math.abs(smooth[c]! - slope[c]!)).toBeLessThanOrEqual(2);
  });
  it("says nothing of nothing and skips what is unknown", () => {
    expect([...runningMedian(new Float64Array(0), 4)]).toEqual([]);
    expect([...runningMedian(Float64Array.of(1, Number.NaN, 3), 4)]).toEqual([1, 2, 3]);
  });
});
