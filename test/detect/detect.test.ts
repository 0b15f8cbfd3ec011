import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { openDataset } from "../../src/dataset/open.ts";
import { detect } from "../../src/detect/detect.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { CLEAN, FAULTY, TRAPS } from "../support/scenarios.ts";
import { CONTINUUM, subject } from "./tracks/judge-events.ts";

describe("detect", () => {
  it("unravels a dead antenna, a burst and a jump on another antenna into exactly those three", async () => {
    const survey = await surveyDataset(FAULTY.three().dataset);
    const events = await detect(survey, CONTINUUM);
    expect(events.map(subject)).toEqual([
      "silent-antenna, antenna, antenna 4",
      "burst, time",
      "phase-jump, antenna, antenna 7",
    ]);
    expect(events[1]!.scope.channels).toEqual([[3, 9]]);
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

  it("puts the most significant first, and every sample count within the dataset's", async () => {
    const survey = await surveyDataset(FAULTY.three().dataset);
    const events = await detect(survey, CONTINUUM);
    const significances = events.map(({ significance }) => significance);
    expect(significances).toEqual([...significances].sort((a, b) => b - a));
    for (const { samples, outlying, confidence } of events) {
      expect(outlying).toBeGreaterThan(0);
      expect(outlying).toBeLessThanOrEqual(samples);
      expect(samples).toBeLessThanOrEqual(survey.totals.usable);
      expect(confidence).toBeGreaterThan(0);
      expect(confidence).toBeLessThanOrEqual(1);
    }
  });

  it("finds the same however the survey was blocked", async () => {
    const { dataset } = FAULTY.three();
    const one = await detect(await surveyDataset(dataset), CONTINUUM);
    const other = await detect(await surveyDataset(dataset, { blockRows: 37 }), CONTINUUM);
    expect(other).toEqual(one);
  });

  it("leaves out what another event explains", async () => {
    const kinds = async (name: "baselineGain" | "delaySlope" | "gainStep") =>
      (await detect(await surveyDataset(FAULTY[name]().dataset), CONTINUUM)).map(({ kind }) => kind);
    expect(await kinds("baselineGain")).toEqual(["closure"]);
    expect(await kinds("delaySlope")).toEqual(["delay-slope"]);
    expect(await kinds("gainStep")).toEqual(["gain-step"]);
  });

  it.each([
    ["good data", CLEAN.circular],
    ["a double source", TRAPS.doubleSource],
    ["faint data", TRAPS.faint],
  ])("finds nothing in %s", async (_, make) => {
    expect(await detect(await surveyDataset(make().dataset), CONTINUUM)).toEqual([]);
  });
});
