import { describe, expect, it } from "vitest";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import type { DetectedEvent } from "../../src/detect/event.ts";
import { EVENT_FORM, eventMeasures, INTERFERENCE_FORM } from "../../src/detect/event-table.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { gridRows, memoryDataset } from "../support/memory-dataset.ts";

/** 4 antennas, 6 baselines, 10 integrations of 10 s, 4 channels. */
const survey = await surveyDataset(memoryDataset({ rows: gridRows(4, 10), channels: 4 }));

const JUMP: DetectedEvent = {
  kind: "phase-jump",
  cause: "antenna",
  scope: { ...EVERYTHING, antennas: [2], time: [survey.times[5]!, survey.times[9]!] },
  flag: { ...EVERYTHING, antennas: [2], time: [survey.times[5]!, survey.times[9]!] },
  size: -60,
  sizeError: 2,
  unit: "deg",
  significance: 30,
  confidence: 0.99,
  samples: 60,
  outlying: 60,
  evidence: "",
  repair: "calibrate",
};
const LINE: DetectedEvent = {
  ...JUMP,
  kind: "persistent-line",
  cause: "channels",
  scope: { ...EVERYTHING, channels: [[1, 2]] },
  flag: null,
  size: 5,
  sizeError: Number.NaN,
  unit: "sigma",
  samples: 120,
  outlying: 100,
  repair: null,
};

describe("eventMeasures", () => {
  const [events, interference] = eventMeasures(survey, [JUMP, LINE]);

  it("gives a row an event, in their order, with the columns it promises", () => {
    expect(events!.table.columnNames()).toEqual(EVENT_FORM.map(({ name }) => name));
    expect(events!.table.array("kind")).toEqual(["phase-jump", "persistent-line"]);
    expect(events!.scopes).toEqual([JUMP.scope, LINE.scope]);
  });

  it("names antenna, channels and times, and null for all of them", () => {
    expect(events!.table.array("antenna")).toEqual([2, null]);
    expect(events!.table.array("channel_lo")).toEqual([null, 1]);
    expect(events!.table.array("channel_hi")).toEqual([null, 2]);
    expect(events!.table.array("time_start")).toEqual([survey.times[5], null]);
  });

  it("says how much of the array and of the time an event takes", () => {
    expect(events!.table.array("baselines")).toEqual([3, 6]);
    expect(events!.table.array("array_fraction")).toEqual([0.5, 1]);
    expect(events!.table.array("time_fraction")).toEqual([0.5, 1]);
    expect(events!.table.array("fraction")).toEqual([60 / 240, 120 / 240]);
    expect(events!.table.get("duration", 0)).toBeCloseTo(50, 3);
  });

  it("gives the error that a phase makes: |exp(i 60 deg) - 1| = 1", () => {
    expect(events!.table.get("error", 0)).toBeCloseTo(1, 12);
    expect(events!.table.get("error", 1)).toBeNaN();
  });

  it("sums the interference up in one row", () => {
    expect(interference!.table.columnNames()).toEqual(INTERFERENCE_FORM.map(({ name }) => name));
    expect(interference!.table.object(0)).toMatchObject({
      outlying: 100,
      outlying_fraction: 100 / 240,
      events: 1,
      channels: 4,
      channels_affected: 2,
      channels_lost: 2,
      flag_fraction: 0,
    });
  });

  it("has the same columns without events", () => {
    const [none, quiet] = eventMeasures(survey, []);
    expect(none!.table.numRows()).toBe(0);
    expect(none!.table.columnNames()).toEqual(EVENT_FORM.map(({ name }) => name));
    expect(quiet!.table.object(0)).toMatchObject({ events: 0, outlying: 0, outlying_fraction: 0 });
  });
});
