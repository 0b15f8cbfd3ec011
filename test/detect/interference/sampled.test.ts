import { describe, expect, it } from "vitest";
import { detectInterference } from "../../../src/detect/interference/interference.ts";
import { choose, SEEN } from "../../../src/detect/pass/choice.ts";
import { secondPass, tilesToRead } from "../../../src/detect/pass/second-pass.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import type { Survey } from "../../../src/measure/survey-result.ts";
import { type Changes, withFaults } from "../../support/scenarios.ts";

/** 27 antennas, 160 integrations of 32 channels and two products: four tiles. */
const LONG: Changes = {
  array: { layout: { kind: "spiral", antennas: 27, inner: "40m", radius: "1km", relief: "2m" } },
  time: { duration: "1600s", integration: "10s" },
  frequency: { channels: 32 },
};
type Faults = Parameters<typeof withFaults>[0];

async function surveyed(faults: Faults): Promise<Survey> {
  return await surveyDataset(withFaults(faults, LONG).dataset);
}

const REQUEST = { purpose: "continuum", lineChannels: [] } as const;

describe("a second pass over a dataset of several tiles", () => {
  it("reads nothing where the screen shows nothing, and finds nothing", async () => {
    const survey = await surveyed([]);
    const choice = choose(survey);
    expect(choice.cut.tiles).toBeGreaterThan(2);
    expect(tilesToRead(choice)).toEqual([]);
    expect(await detectInterference(survey, REQUEST, [])).toEqual([]);
  });

  it("looks at the tiles that a burst is in, and finds it as a look at all of them does", async () => {
    const survey = await surveyed([
      { kind: "burst", channels: "10-14", time: ["3min", "4min"], amplitude: "5 sigma" },
    ]);
    const choice = choose(survey);
    expect(choice.looks.filter((look) => look?.includes(SEEN)).length).toBe(1);
    const [event, ...more] = await detectInterference(survey, REQUEST, []);
    expect(more).toEqual([]);
    expect(event!.kind).toBe("burst");
    expect(event!.flag).toMatchObject({ channels: [[10, 14]], baselines: null });
    // 6 integrations of 351 baselines, 5 channels and 2 products.
    expect(event!.samples).toBe(6 * 351 * 5 * 2);
  });

  it("looks at a sample of the baselines where a line is always there, and counts all that it takes", async () => {
    const survey = await surveyed([{ kind: "persistent-line", channels: "20-21", amplitude: "6 sigma" }]);
    const choice = choose(survey);
    expect(choice.isWhole).toBe(false);
    expect([...choice.leftOut!.keys()].filter((c) => choice.leftOut![c] === 1)).toEqual([19, 20, 21, 22]);
    const [event, ...more] = await detectInterference(survey, REQUEST, []);
    expect(more).toEqual([]);
    expect(event).toMatchObject({ kind: "persistent-line", samples: survey.times.length * 351 * 2 * 2 });
    expect(event!.flag).toMatchObject({ channels: [[20, 21]], baselines: null, time: null });
  });

  it("keeps a line out of all averages alike, whether their rows were looked at or not", async () => {
    const survey = await surveyed([{ kind: "persistent-line", channels: "20-21", amplitude: "20 sigma" }]);
    const { clean, choice } = await secondPass(survey);
    const good = (await surveyed([])).tracks;
    const error = (real: Float32Array) =>
      Math.sqrt(real.reduce((sum, x, i) => sum + (x - good.real[i]!) ** 2, 0) / real.length);
    expect(choice.isWhole).toBe(false);
    // Of 32 channels 28 are left, and of those looked at not all that is beside the line.
    expect(Math.min(...clean.count)).toBeGreaterThan(14);
    expect(Math.max(...clean.count)).toBe(28);
    expect(error(clean.real)).toBeLessThan(0.3 * error(survey.tracks.real));
  });
});
