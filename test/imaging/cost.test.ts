import { describe, expect, it } from "vitest";
import { flaggedView } from "../../src/dataset/flagged-view.ts";
import { EVERYTHING, type Selection } from "../../src/dataset/selection.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { observedArray, threeArms } from "./observed-array.ts";

/** Of the change that a full recomputation gives. */
const COST_TOLERANCE = 0.05;
/** The outer antennas of two groups of six. */
const OUTER = [2, 4, 6, 8, 10, 12];
/** A change smaller than this is none. */
const NO_CHANGE = 3e-4;

describe("the cost of selections", () => {
  const observed = observedArray({
    antennas: threeArms(700, 4, 1),
    integrations: 30,
    channels: 6,
    channelWidth: 8e6,
    weight: ({ antenna1, integration }) => 2 + ((antenna1 + integration) % 3),
  });
  const { dataset, survey } = observed;
  const plan = derivePlan({ fieldOfView: 0.006 }, survey);
  const base = forecast(survey, plan);
  const time = (from: number, to: number) => [survey.times[from]!, survey.times[to]!] as const;

  it.each<[string, Partial<Selection>]>([
    ["an antenna of the core", { antennas: [1] }],
    ["an antenna at the end of an arm", { antennas: [4] }],
    ["a third of the time", { time: time(0, 9) }],
    ["a third of the band", { channels: [[4, 5]] }],
    ["the short baselines of an antenna, for a time", { antennas: [5], time: time(5, 20) }],
    ["one baseline", { baselines: [[4, 8]] }],
  ])("is that of computing again without %s", async (_, part) => {
    const selection: Selection = { ...EVERYTHING, ...part };
    const before = await base;
    const [cost] = await before.costs([selection]);
    const flagged = await surveyDataset(flaggedView(dataset, [selection]));
    const after = await forecast(flagged, plan);
    const beamOf = (which: typeof before) => which.image.weightings.find((result) => result.planned)!.before;
    const [old, now] = [beamOf(before), beamOf(after)];
    agree(cost!.beamMajorChangeFraction, now.majorArcsec / old.majorArcsec - 1);
    agree(cost!.beamMinorChangeFraction, now.minorArcsec / old.minorArcsec - 1);
    agree(
      cost!.peakSidelobeChangeFraction,
      Math.abs(now.peakSidelobeFraction) / Math.abs(old.peakSidelobeFraction) - 1,
    );
    // Bins of spacing are a five-hundredth wide.
    const gap = (which: typeof before) => which.image.coverage.before.largestRadialGapRatioFraction;
    expect(Math.abs(cost!.largestGapChangeFraction - (gap(after) / gap(before) - 1))).toBeLessThan(0.005);
    const naturalWeight = (view: typeof survey) =>
      view.tracks.weight.reduce((sum, weight) => sum + weight, 0);
    const kept = naturalWeight(flagged) / naturalWeight(survey);
    expect(cost!.sensitivityLossFraction).toBeCloseTo(1 - Math.sqrt(kept), 5);
  });

  it("counts as lost only the spacings that nothing else covers", async () => {
    // Two groups far apart: what lies between their spacings is a hole.
    const groups = observedArray({
      antennas: [
        ...threeArms(80, 2),
        ...threeArms(80, 2).map(([east, north]) => [east + 2000, north, 0] as const),
      ],
      integrations: 12,
      channels: 6,
      subbands: 2,
    });
    const groupPlan = derivePlan({ fieldOfView: 0.02 }, groups.survey);
    const whole = await forecast(groups.survey, groupPlan);
    expect(whole.image.coverage.before.largestRadialGapRatioFraction).toBeGreaterThan(3);
    const [middle, edges, shorter] = await whole.costs([
      { ...EVERYTHING, channels: [[2, 3]] },
      { ...EVERYTHING, subbands: [1], channels: [[3, 5]] },
      { ...EVERYTHING, antennas: OUTER },
    ]);
    // The band's middle covers nothing that its edges do not; its upper end does, by a little.
    expect(middle!.largestGapChangeFraction).toBe(0);
    expect(Math.abs(edges!.largestGapChangeFraction)).toBeLessThan(0.01);
    const flagged = await surveyDataset(flaggedView(groups.dataset, [{ ...EVERYTHING, antennas: OUTER }]));
    const after = await forecast(flagged, groupPlan);
    const ratio = (which: typeof whole) => which.image.coverage.before.largestRadialGapRatioFraction;
    expect(ratio(after)).toBeGreaterThan(1.02 * ratio(whole));
    expect(shorter!.largestGapChangeFraction).toBeCloseTo(ratio(after) / ratio(whole) - 1, 1.8);
  });

  it("is the same for a selection alone and among others", async () => {
    const selections = [
      { ...EVERYTHING, antennas: [2] },
      { ...EVERYTHING, channels: [[0, 1]] as const },
    ];
    const together = await (await base).costs(selections);
    const alone = await Promise.all(selections.map(async (one) => (await base).costs([one])));
    expect(together).toEqual(alone.flat());
  });

  it("is nothing for a selection of nothing, and everything for everything", async () => {
    const [none, all] = await (await base).costs([{ ...EVERYTHING, antennas: [] }, EVERYTHING]);
    expect(none!.sensitivityLossFraction).toBe(0);
    expect(none!.beamMajorChangeFraction).toBe(0);
    expect(none!.peakSidelobeChangeFraction).toBe(0);
    expect(none!.largestGapChangeFraction).toBe(0);
    expect(all!.sensitivityLossFraction).toBe(1);
    expect(all!.beamMajorChangeFraction).toBeNaN();
  });
});

function agree(estimate: number, truth: number): void {
  expect(Math.abs(estimate - truth)).toBeLessThan(COST_TOLERANCE * Math.abs(truth) + NO_CHANGE);
}
