import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { finishSurvey } from "../../src/measure/finish-survey.ts";
import { joinParts, surveyPart } from "../../src/measure/survey.ts";
import type { SurveyPart } from "../../src/measure/survey-part.ts";
import { simulated, withFaults } from "../support/scenarios.ts";
import { surveyBits } from "./survey-bits.ts";

const SMALL = {
  time: { duration: "3min" },
  array: { layout: { kind: "spiral", antennas: 5, inner: "40m", radius: "1km", relief: "2m" } },
  frequency: { channels: 6 },
} as const;
const { dataset } = withFaults(
  [
    { kind: "burst", channels: "1-3", amplitude: "8 sigma" },
    { kind: "flags", channels: "0", share: 0.5 },
    { kind: "not-finite", channels: "5", share: 0.3 },
    { kind: "duplicate-rows", time: ["60s", "80s"] },
    { kind: "reversed-rows", time: ["120s", "140s"] },
    { kind: "swapped-order", antennas: [3] },
  ],
  { ...SMALL, name: "odd rows" },
);

function partOf(source: Dataset, rows: [number, number], blockRows: number, memory?: number) {
  return surveyPart(source, { rows, blockRows, ...(memory === undefined ? {} : { memory }) });
}

describe("a survey", () => {
  // Few bytes force time bins and channel groups: the sums that cross rows.
  it.each([
    ["one cell a row", undefined],
    ["time bins and shared sketches", 60_000],
  ])("is the same to the last bit however the rows are shared out: %s", async (_, memory) => {
    const whole = surveyBits(finishSurvey(await partOf(dataset, [0, dataset.rows], 1000, memory)));
    await fc.assert(
      fc.asyncProperty(
        fc.array(fc.nat(dataset.rows), { maxLength: 4 }),
        fc.integer({ min: 1, max: 40 }),
        fc.integer(),
        async (cuts, blockRows, order) => {
          const edges = [0, ...cuts, dataset.rows].sort((a, b) => a - b);
          const parts = await Promise.all(
            edges.slice(1).map((end, i) => partOf(dataset, [edges[i]!, end], blockRows, memory)),
          );
          const shuffled = parts
            .map((part, i) => ({ part, key: Math.sin(order + 7 * i) }))
            .sort((a, b) => a.key - b.key)
            .map(({ part }) => part) as [SurveyPart, ...SurveyPart[]];
          expect(surveyBits(finishSurvey(joinParts(shuffled)))).toEqual(whole);
        },
      ),
      { numRuns: 12 },
    );
  });

  it("of a dataset in baseline order is that of the same rows in time order, but for the order", async () => {
    const [byTime, byBaseline] = [simulated(SMALL), simulated({ ...SMALL, order: "baseline-time" })];
    const [a, b] = await Promise.all(
      [byTime, byBaseline].map(async (one) =>
        finishSurvey(await partOf(one!.dataset, [0, one!.dataset.rows], 64)),
      ),
    );
    // Each baseline begins again at the first time, as it should.
    expect(b!.totals.outOfOrderRows).toBe(0);
    expect(a!.totals.outOfOrderRows).toBe(0);
    expect(b!.tracks.baseline).toEqual(a!.tracks.baseline);
    expect(b!.tracks.time).toEqual(a!.tracks.time);
  });
});
