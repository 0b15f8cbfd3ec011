import { describe, expect, it } from "vitest";
import { detect } from "../../../src/detect/detect.ts";
import { eventMeasures } from "../../../src/detect/event-table.ts";
import { smallestJump } from "../../../src/detect/tracks/smallest-jump.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import { Random } from "../../../src/simulate/random.ts";
import { gridRows, type MemoryData, type MemorySample, memoryDataset } from "../../support/memory-dataset.ts";
import { simulated } from "../../support/scenarios.ts";
import { CONTINUUM, subject } from "./judge-events.ts";

/** A point source of 1 Jy under noise of 0.1 Jy, turned by `turn` radians. */
function noisy(turn = 0): MemorySample {
  return [Math.cos(turn) + 0.1 * RANDOM.normal(), Math.sin(turn) + 0.1 * RANDOM.normal(), 1];
}
const RANDOM = Random.of(20260301, 1);

async function eventsOf(data: MemoryData) {
  const survey = await surveyDataset(memoryDataset(data));
  const events = await detect(survey, CONTINUUM);
  expect(eventMeasures(survey, events)[0]!.table.numRows()).toBe(events.length);
  return { survey, events };
}

describe("detection on little or odd data", () => {
  it.each<[string, MemoryData]>([
    ["no rows", { rows: [] }],
    ["one row", { rows: gridRows(2, 1) }],
    ["three rows", { rows: gridRows(3, 1), sample: () => noisy() }],
    ["one baseline", { rows: gridRows(2, 100), channels: 8, sample: () => noisy() }],
    ["three antennas", { rows: gridRows(3, 60), channels: 4, sample: () => noisy() }],
    ["one channel", { rows: gridRows(6, 60), sample: () => noisy() }],
    ["no noise at all", { rows: gridRows(5, 40), channels: 4 }],
    ["nothing but zeros", { rows: gridRows(5, 40), channels: 4, sample: () => [0, 0, 1] }],
    ["nothing finite", { rows: gridRows(4, 20), sample: () => [Number.NaN, Number.NaN, 1] }],
    ["everything flagged", { rows: gridRows(4, 60), sample: () => [1, 0, -1] }],
    [
      "a product that is absent",
      {
        rows: gridRows(6, 40),
        channels: 4,
        polarizations: ["RR", "LL"],
        sample: (_, __, ___, p) => (p === 1 ? [0, 0, 1] : noisy()),
      },
    ],
    ["crossed hands alone", { rows: gridRows(6, 40), polarizations: ["RL", "LR"], sample: () => noisy() }],
  ])("finds nothing in %s", async (_, data) => {
    expect((await eventsOf(data)).events).toEqual([]);
  });

  it("calls a jump of the only baseline the baseline's, whole", async () => {
    const { events, survey } = await eventsOf({
      rows: gridRows(2, 100),
      channels: 8,
      sample: (row) => noisy(row >= 50 ? 0.8 : 0),
    });
    expect(events.map(subject)).toEqual(["phase-jump, baseline, baseline 1-2"]);
    expect(events[0]!.scope.time![0]).toBe(survey.times[50]);
    expect(Math.abs(events[0]!.size - (0.8 * 180) / Math.PI)).toBeLessThan(3 * events[0]!.sizeError);
  });

  it("names an antenna whose samples are all exact zeros", async () => {
    const rows = gridRows(6, 60);
    const { events } = await eventsOf({
      rows,
      channels: 4,
      sample: (row) => (rows[row]!.antenna1 === 1 ? [0, 0, 1] : noisy()),
    });
    expect(events.map(subject)).toEqual(["stuck-zeros, antenna, antenna 1"]);
  });

  it("says what jump would have been found: less of it the more signal there is", async () => {
    const of = async (flux: string) =>
      smallestJump(await surveyDataset(simulated({ sky: [{ flux }] }).dataset));
    const [bright, faint] = [await of("1Jy"), await of("50mJy")];
    expect(bright).toBeLessThan(3);
    expect(faint).toBeGreaterThan(10);
    expect(faint).toBeLessThan(60);
    expect(await of("1mJy")).toBeNaN();
  });
});
