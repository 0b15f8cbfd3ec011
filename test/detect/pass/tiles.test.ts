import { describe, expect, it } from "vitest";
import { wholeChoice } from "../../../src/detect/pass/choice.ts";
import { type Tile, TileReader } from "../../../src/detect/pass/tiles.ts";
import { tileShape } from "../../../src/measure/screen/shape.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import type { Survey } from "../../../src/measure/survey-result.ts";
import { CLEAN, FAULTY } from "../../support/scenarios.ts";

async function* tilesOf(survey: Survey): AsyncIterable<Tile> {
  const { cut, looks } = wholeChoice(survey);
  const reader = new TileReader(survey, cut);
  for (const [number, look] of looks.entries()) yield await reader.read(number, look!, null);
}

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

  it("hold enough integrations to know noise by channel, within a bound on memory, and whole slots", () => {
    const { dataset } = CLEAN.twentySevenAntennas();
    const shape = { subbands: 1, channels: 256, polarizations: 4 } as const;
    const large = { ...dataset, shape, rows: 1e9 };
    const { tileRows, slotRows, slotsPerTile, tiles } = tileShape(large);
    expect(tileRows / 351).toBeGreaterThan(8);
    expect(tileRows * 1024).toBeLessThanOrEqual(1 << 24);
    expect(tileRows).toBe(slotRows * slotsPerTile);
    expect(tiles * tileRows).toBeGreaterThanOrEqual(1e9);
    const small = CLEAN.circular().dataset;
    expect(tileShape(small)).toMatchObject({ tileRows: small.rows, tiles: 1 });
    const wide = { ...large, shape: { subbands: 64, channels: 65536, polarizations: 4 } };
    expect(tileShape(wide).tileRows).toBe(1);
  });
});
