import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { openDataset } from "../../src/dataset/open.ts";
import { detect } from "../../src/detect/detect.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { FAULTY } from "../support/scenarios.ts";
import { CONTINUUM, subject } from "./tracks/judge-events.ts";

const three = await surveyDataset(FAULTY.three().dataset);
const found = await detect(three, CONTINUUM);

describe("detect", () => {
  it("unravels a dead antenna, a burst and a jump on another antenna into exactly those three", () => {
    expect(found.map(subject)).toEqual([
      "silent-antenna, antenna, antenna 4",
      "burst, time",
      "phase-jump, antenna, antenna 7",
    ]);
    expect(found[1]!.scope.channels).toEqual([[3, 9]]);
  });

  it("unravels the sample with three faults into its antenna, its interference and its jump", async () => {
    const path = fileURLToPath(new URL("../../sample-inputs/three-faults.uvfits", import.meta.url));
    const events = await detect(await surveyDataset(await openDataset(path)), CONTINUUM);
    const antennas = events.filter(({ cause }) => cause === "antenna");
    expect(antennas.map(subject)).toEqual([
      "silent-antenna, antenna, antenna 4",
      "phase-jump, antenna, antenna 9",
    ]);
    expect(Math.abs(antennas[1]!.size - 48)).toBeLessThan(3 * antennas[1]!.sizeError);
    const others = events.filter(({ cause }) => cause !== "antenna").map(({ kind }) => kind);
    expect(new Set(others)).toEqual(new Set(["persistent-line", "burst"]));
  });

  it("puts the most significant first, and every sample count within the dataset's", () => {
    const significances = found.map(({ significance }) => significance);
    expect(significances).toEqual([...significances].sort((a, b) => b - a));
    for (const { samples, outlying, confidence } of found) {
      expect(outlying).toBeGreaterThan(0);
      expect(outlying).toBeLessThanOrEqual(samples);
      expect(samples).toBeLessThanOrEqual(three.totals.usable);
      expect(confidence).toBeGreaterThan(0);
      expect(confidence).toBeLessThanOrEqual(1);
    }
  });

  it("finds the same however the survey was blocked", async () => {
    const other = await surveyDataset(FAULTY.three().dataset, { blockRows: 37 });
    expect(await detect(other, CONTINUUM)).toEqual(found);
  });

  it("leaves out what another event explains", async () => {
    // A gain of one baseline belies its weights too.
    const survey = await surveyDataset(FAULTY.baselineGain().dataset);
    expect((await detect(survey, CONTINUUM)).map(({ kind }) => kind)).toEqual(["closure"]);
  });
});
