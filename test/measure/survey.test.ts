import { describe, expect, it } from "vitest";
import { surveyDataset } from "../../src/measure/survey.ts";
import type { Measure, Measures } from "../../src/measure/table.ts";
import { CLEAN, FAULTY, simulated, TRAPS } from "../support/scenarios.ts";

type Row = Record<string, number | string | null>;
const rowsOf = (measures: Measures, name: string) => (measures.get(name) as Measure).table.objects() as Row[];
const only = (measures: Measures, name: string) => rowsOf(measures, name)[0]!;

describe("surveyDataset", () => {
  it("counts every sample once, as what it is", async () => {
    const { dataset } = FAULTY.notFinite();
    const { totals, measures } = await surveyDataset(dataset);
    expect(totals.usable + totals.flagged + totals.bad + totals.zero).toBe(totals.samples);
    expect(totals.samples).toBe(dataset.rows * 16 * 2);
    // A share of 0.3 of channel 7 is not finite: binomial, 13 standard deviations either way.
    const channel = rowsOf(measures, "channel").find((row) => row.channel === 7)!;
    expect(channel.bad_fraction).toBeGreaterThan(0.25);
    expect(channel.bad_fraction).toBeLessThan(0.35);
    expect(totals.bad).toBe(channel.bad);
  });

  it("counts infinite weights as bad, not as flagged", async () => {
    const { totals } = await surveyDataset(FAULTY.infiniteWeights().dataset);
    expect(totals.bad).toBe(totals.samples / 16);
    expect(totals.flagged).toBe(0);
  });

  it("counts exact zeros as no measurement", async () => {
    const { measures } = await surveyDataset(FAULTY.stuckZeros().dataset);
    const antennas = rowsOf(measures, "antenna");
    expect(antennas.find((row) => row.antenna === 4)!.zero_fraction).toBeGreaterThan(0.15);
    // Each other antenna has one of its eight baselines to antenna 4.
    expect(antennas.find((row) => row.antenna === 5)!.zero_fraction).toBeLessThan(0.03);
  });

  it("counts an antenna's flags on the antenna and a channel's on the channel", async () => {
    const ofAntenna = (await surveyDataset(FAULTY.flaggedAntenna().dataset)).measures;
    const antenna = rowsOf(ofAntenna, "antenna").find((row) => row.antenna === 4)!;
    expect([antenna.flagged_fraction, antenna.usable]).toEqual([1, 0]);
    expect(only(ofAntenna, "dataset").antennas_without_data).toBe(1);
    const ofChannels = (await surveyDataset(FAULTY.flaggedChannels().dataset)).measures;
    const fractions = rowsOf(ofChannels, "channel").map((row) => row.flagged_fraction);
    expect(fractions).toEqual([1, 1, 1, 1, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0]);
  });

  // The default scenario: SEFD 400 Jy, 500 kHz, 10 s; the radiometer equation gives 400/sqrt(2 x 5e5 x 10) = 0.1265 Jy.
  it("measures the noise that the radiometer equation gives", async () => {
    const { measures } = await surveyDataset(CLEAN.circular().dataset);
    const sigma = 400 / Math.sqrt(2 * 5e5 * 10);
    expect(Math.abs((only(measures, "dataset").noise_sigma as number) / sigma - 1)).toBeLessThan(0.03);
    for (const row of rowsOf(measures, "antenna"))
      expect(Math.abs((row.noise_ratio as number) - 1)).toBeLessThan(0.06);
  });

  it("measures the same noise under a bright double source", async () => {
    const { measures } = await surveyDataset(TRAPS.doubleSource().dataset);
    expect(
      Math.abs((only(measures, "dataset").noise_sigma as number) / (400 / Math.sqrt(1e7)) - 1),
    ).toBeLessThan(0.1);
  });

  it("measures noise in time where there is one channel", async () => {
    const { measures } = await surveyDataset(simulated({ frequency: { channels: 1 } }).dataset);
    expect(
      Math.abs((only(measures, "dataset").noise_sigma as number) / (400 / Math.sqrt(1e7)) - 1),
    ).toBeLessThan(0.1);
  });

  it("keeps noise from being raised by interference in a few channels", async () => {
    const { measures } = await surveyDataset(FAULTY.persistentLine().dataset);
    expect(
      Math.abs((only(measures, "dataset").noise_sigma as number) / (400 / Math.sqrt(1e7)) - 1),
    ).toBeLessThan(0.1);
  });

  it("gives a weak antenna's gain against the others", async () => {
    const { measures } = await surveyDataset(FAULTY.weakAntenna().dataset);
    const antennas = rowsOf(measures, "antenna");
    expect(antennas.find((row) => row.antenna === 4)!.amplitude_ratio).toBeCloseTo(0.4, 1);
    expect(antennas.find((row) => row.antenna === 5)!.amplitude_ratio).toBeCloseTo(1, 1);
  });

  it("finds no coherence on a silent antenna", async () => {
    const { measures } = await surveyDataset(FAULTY.silentAntenna().dataset);
    const antennas = rowsOf(measures, "antenna");
    expect(antennas.find((row) => row.antenna === 4)!.coherence).toBeLessThan(0.6);
    expect(antennas.find((row) => row.antenna === 5)!.coherence).toBeGreaterThan(0.95);
  });

  it("counts repeated rows and rows out of order", async () => {
    const repeated = await surveyDataset(FAULTY.duplicateRows().dataset);
    expect(repeated.totals.duplicateRows).toBeGreaterThan(0);
    expect(repeated.totals.duplicateRows).toBe(repeated.dataset.rows - CLEAN.circular().dataset.rows);
    const reversed = await surveyDataset(FAULTY.reversedRows().dataset);
    expect(reversed.totals.outOfOrderRows).toBeGreaterThan(0);
    expect(reversed.totals.duplicateRows).toBe(0);
  });

  it("tells scans by field and by gap", async () => {
    const survey = await surveyDataset(CLEAN.fieldsAndGaps().dataset);
    expect(survey.scans.length).toBe(6);
    expect(new Set(survey.scans.map((scan) => scan.field))).toEqual(new Set([1, 2]));
    for (let cell = 0; cell < survey.tracks.cells; cell++) {
      expect(survey.scans[survey.tracks.scan[cell]!]!.field).toBe(survey.tracks.field[cell]);
    }
  });

  it("sees a gap in time", async () => {
    const { measures } = await surveyDataset(FAULTY.gap().dataset);
    expect(only(measures, "dataset").largest_gap_s).toBeGreaterThan(300);
    expect(only(measures, "dataset").gaps).toBe(1);
  });

  it("conjugates rows stored with the higher antenna first", async () => {
    const straight = await surveyDataset(CLEAN.circular().dataset);
    const swapped = await surveyDataset(FAULTY.swappedOrder().dataset);
    expect(swapped.baselines).toEqual(straight.baselines);
  });

  it("survives a dataset without a usable sample", async () => {
    const { dataset } = simulated({ time: { duration: "30s" }, faults: [{ kind: "flags" }] });
    const { totals, measures } = await surveyDataset(dataset);
    expect(totals.flagged).toBe(totals.samples);
    expect(only(measures, "dataset").flagged_fraction).toBe(1);
    expect(only(measures, "dataset").noise_sigma).toBeNaN();
  });

  it("survives a single integration", async () => {
    const { dataset } = simulated({ time: { duration: "10s" } });
    const { totals, times } = await surveyDataset(dataset);
    expect(totals.rows).toBe(36);
    expect(times.length).toBe(1);
  });

  it("describes every column of every measure", async () => {
    const { measures } = await surveyDataset(CLEAN.circular().dataset);
    for (const measure of measures.values()) {
      expect(measure.columns.map((column) => column.name)).toEqual(measure.table.columnNames());
      for (const column of measure.columns) expect(column.meaning).not.toBe("");
    }
  });
});
