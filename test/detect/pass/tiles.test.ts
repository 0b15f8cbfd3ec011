import { describe, expect, it } from "vitest";
import { tileRows, tilesOf } from "../../../src/detect/pass/tiles.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import { CLEAN, FAULTY } from "../../support/scenarios.ts";

describe("tiles", () => {
  it("take every row of the cross-correlations once, into the cell of its baseline and time", async () => {
    const survey = await surveyDataset(FAULTY.duplicateRows().dataset);
    const seen = new Uint8Array(survey.tracks.cells);
    let rows = 0;
    for await (const tile of tilesOf(survey)) {
      for (let row = 0; row < tile.rows; row++, rows++) {
        const cell = tile.cell[row]!;
        expect(survey.tracks.time[cell]).toBe(tile.time[row]);
        expect(survey.tracks.baseline[cell]).toBe(tile.baseline[row]);
        seen[cell] = 1;
      }
    }
    expect(rows).toBe(survey.totals.rows);
    // Repeated rows have cells of their own but the same time: they share one here.
    expect(seen.reduce((sum, mark) => sum + mark, 0)).toBe(survey.totals.rows - survey.totals.duplicateRows);
  });

  it("sort their rows by baseline, then time", async () => {
    const survey = await surveyDataset(CLEAN.eightAntennas().dataset);
    for await (const tile of tilesOf(survey)) {
      const runs = tile.runs();
      expect(runs.map(({ baseline }) => baseline)).toEqual(survey.baselines.map((_, b) => b));
      for (const { first, rows } of runs) {
        const times = Array.from({ length: rows }, (_, i) => tile.time[tile.order[first + i]!]!);
        expect(times).toEqual([...times].sort((a, b) => a - b));
      }
    }
  });

  it("hold enough integrations to know noise by channel, within a bound on memory", () => {
    const { dataset } = CLEAN.circular();
    const shape = { subbands: 1, channels: 256, polarizations: 4 };
    const large = { ...dataset, shape, rows: 1e9 };
    // 64 antennas: 2016 baselines
    const rows = tileRows(large, 2016);
    expect(rows / 2016).toBeGreaterThan(8);
    expect(rows * 1024).toBeLessThanOrEqual(1 << 24);
    expect(tileRows(dataset, 36)).toBe(dataset.rows);
    expect(tileRows({ ...large, shape: { subbands: 64, channels: 65536, polarizations: 4 } }, 10)).toBe(1);
  });
});
