import { describe, expect, it } from "vitest";
import { surveyDataset } from "../../src/measure/survey.ts";
import { nearestTime } from "../../src/measure/times.ts";
import { gridRows, type MemoryRow, memoryDataset, START } from "../support/memory-dataset.ts";

const SECOND = 1 / 86_400;
const surveyOf = (rows: readonly MemoryRow[]) => surveyDataset(memoryDataset({ rows }));
const at = (seconds: number, more: Partial<MemoryRow> = {}): MemoryRow => ({
  time: START + seconds * SECOND,
  antenna1: 1,
  antenna2: 2,
  ...more,
});

describe("integrations", () => {
  it("are told apart beyond a float32 step of the day fraction, and not within one", async () => {
    // 5.15 ms: NumPy's spacing of float32 at 0.6 day.
    const rows = [at(0), at(0.00515, { antenna2: 3 }), at(10), at(10.00515, { antenna2: 3 }), at(20)];
    const { times, measures } = await surveyOf(rows);
    expect(times.length).toBe(3);
    // A range of the table selects every row of its integration.
    const { time_start, time_end } = measures.get("integration")!.table.object(0) as Record<string, number>;
    expect([time_start, time_end]).toEqual([rows[0]!.time, rows[1]!.time]);
  });

  it("of two milliseconds are not put together", async () => {
    const rows = Array.from({ length: 50 }, (_, i) => at(0.002 * i, { integration: 0.002 }));
    expect((await surveyOf(rows)).times.length).toBe(50);
  });

  it("last what most rows say", async () => {
    const rows = [at(0, { integration: 6.78 }), at(7, { integration: 6.78 }), at(14, { integration: 1 })];
    expect((await surveyOf(rows)).integration).toBeCloseTo(6.78, 6);
  });

  it("last as long as they are apart where rows do not say", async () => {
    const rows = [0, 30, 60, 90, 500].map((seconds) => at(seconds, { integration: Number.NaN }));
    expect((await surveyOf(rows)).integration).toBeCloseTo(30, 4);
  });

  it("are found by the nearest time", () => {
    const times = Float64Array.of(1, 2, 4);
    expect([0, 1.4, 1.6, 3.1, 9, Number.NaN].map((time) => nearestTime(times, time))).toEqual([
      0, 0, 1, 2, 2, -1,
    ]);
    expect(nearestTime(new Float64Array(0), 1)).toBe(-1);
  });
});

describe("scans", () => {
  const fieldsOf = async (rows: readonly MemoryRow[]) =>
    (await surveyOf(rows)).scans.map(({ field }) => field);

  it("end at a change of field", async () => {
    const rows = [1, 1, 2, 2, 1, 1].map((field, i) => at(10 * i, { field }));
    expect(await fieldsOf(rows)).toEqual([1, 2, 1]);
  });

  it("end at a gap longer than a minute and five integrations", async () => {
    expect(await fieldsOf([at(0), at(10), at(69), at(79)])).toEqual([1]);
    expect(await fieldsOf([at(0), at(10), at(72), at(82)])).toEqual([1, 1]);
    const slow = [0, 30, 170].map((seconds) => at(seconds, { integration: 30 }));
    expect(await fieldsOf(slow)).toEqual([1]);
  });

  it("of sub-arrays that look at two fields at once go on side by side", async () => {
    const rows = [0, 10, 20, 30].flatMap((seconds) => [
      at(seconds, { field: 1, subarray: 1 }),
      at(seconds, { field: 2, subarray: 2, antenna1: 3, antenna2: 4 }),
    ]);
    const { scans, tracks } = await surveyOf(rows);
    expect(scans.map(({ field }) => field).sort()).toEqual([1, 2]);
    for (let cell = 0; cell < tracks.cells; cell++) {
      expect(scans[tracks.scan[cell]!]!.field).toBe(tracks.field[cell]);
    }
  });
});

describe("gaps", () => {
  it("are listed with what was observed on either side", async () => {
    const rows = [...[0, 10, 20], ...[400, 410], ...[600, 610]].map((seconds, i) =>
      at(seconds, { field: i < 5 ? 1 : 2 }),
    );
    const { measures } = await surveyOf(rows);
    const gaps = measures.get("gap_in_time")!.table.objects() as Record<string, number>[];
    expect(gaps.map(({ seconds }) => Math.round(seconds!))).toEqual([370, 180]);
    expect(gaps.map(({ in_field }) => in_field)).toEqual([1, 0]);
    expect(gaps[0]!.integrations).toBeCloseTo(37, 3);
    const dataset = measures.get("dataset")!.table.object(0) as Record<string, number>;
    expect(dataset.gaps).toBe(1);
    expect(dataset.largest_gap_s).toBeCloseTo(380, 3);
    expect(dataset.gap_fraction).toBeCloseTo(550 / 610, 6);
    expect(dataset.missing_integrations).toBe(0);
  });

  it("shorter than a scan's end are integrations missing", async () => {
    const { measures } = await surveyOf([0, 10, 40, 50].map((seconds) => at(seconds)));
    expect(measures.get("dataset")!.table.get("missing_integrations", 0)).toBe(2);
    expect(measures.get("gap_in_time")!.table.numRows()).toBe(0);
  });
});

describe("repeated rows", () => {
  it("are those of the same time, baseline, field, setup and sub-array, either way round", async () => {
    const rows = [
      at(0),
      at(0.004),
      at(0, { antenna1: 2, antenna2: 1 }),
      at(0, { field: 2 }),
      at(0, { subarray: 2 }),
      at(0, { setup: 1 }),
      at(10),
    ];
    expect((await surveyOf(rows)).totals.duplicateRows).toBe(2);
  });

  it("are still counted where rows are too many to keep", async () => {
    const rows = gridRows(4, 1200);
    const repeated = [...rows, ...rows.slice(100, 140)];
    const { totals, tracks } = await surveyDataset(memoryDataset({ rows: repeated }), { memory: 200_000 });
    expect(tracks.binSeconds).toBeGreaterThan(0);
    expect(totals.duplicateRows).toBe(40);
  });
});

describe("time bins", () => {
  it("take the place of integrations where memory would not hold these, and lose nothing", async () => {
    const dataset = memoryDataset({ rows: gridRows(4, 3000), channels: 2, sample: (row) => [row % 7, 1, 2] });
    const kept = await surveyDataset(dataset);
    const binned = await surveyDataset(dataset, { memory: 400_000 });
    expect(kept.tracks.binSeconds).toBe(0);
    expect(binned.tracks.binSeconds).toBeGreaterThan(10);
    expect(binned.tracks.cells).toBeLessThan(kept.tracks.cells / 2);
    const sum = (values: ArrayLike<number>) => Array.from(values).reduce((total, value) => total + value, 0);
    expect(sum(binned.tracks.usable)).toBe(sum(kept.tracks.usable));
    expect(sum(binned.tracks.weight)).toBe(sum(kept.tracks.weight));
    const mean = ({ real, weight }: typeof kept.tracks) =>
      sum(real.map((re, i) => re * weight[i]!)) / sum(weight);
    expect(mean(binned.tracks)).toBeCloseTo(mean(kept.tracks), 5);
    expect(binned.totals).toEqual(kept.totals);
    expect(binned.times).toEqual(kept.times);
  });
});
