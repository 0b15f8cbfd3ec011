/** Datasets that leave little or nothing to image: the forecast says unknown, and neither fails nor invents. */
import { describe, expect, it } from "vitest";
import { flaggedView } from "../../src/dataset/flagged-view.ts";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast, forecastAfter } from "../../src/imaging/forecast.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import type { Survey } from "../../src/measure/survey-result.ts";
import { CLEAN } from "../support/scenarios.ts";
import { type ArrayOptions, observedArray, threeArms } from "./observed-array.ts";

async function forecastOf(options: Partial<ArrayOptions>) {
  const { survey } = observedArray({
    antennas: threeArms(900, 3, 1),
    integrations: 8,
    channels: 2,
    ...options,
  });
  return { survey, ...(await forecast(survey, derivePlan({}, survey))) };
}

function imageRow(measures: Awaited<ReturnType<typeof forecast>>["measures"]): Record<string, number> {
  return measures.find(({ name }) => name === "image")!.table.object(0) as Record<string, number>;
}

describe("a dataset with every sample flagged", () => {
  it("has an unknown beam, noise and w, and no coverage", async () => {
    const { image, picture, measures, costs } = await forecastOf({ weight: () => -1 });
    expect(picture).toBeNull();
    for (const { before } of image.weightings) {
      expect(before.majorArcsec).toBeNaN();
      expect(before.noiseJy).toBeNaN();
    }
    expect(image.wTerm.known).toBe(false);
    expect(image.coverage.before.filledFraction).toBeNaN();
    expect(image.coverage.before.longestSpacingWavelengths).toBeNaN();
    expect(image.limits).toEqual([]);
    expect(imageRow(measures).dynamic_range_ratio).toBe(0);
    const [cost] = await costs([EVERYTHING]);
    expect(cost!.sensitivityLossFraction).toBeNaN();
  });
});

describe("a dataset with nothing usable and no dish diameter", () => {
  it("has no field to plan, and says so without failing", async () => {
    const { image, picture } = await forecastOf({ weight: () => 0, diameter: null });
    expect(picture).toBeNull();
    expect(image.weightings[0]!.before.majorArcsec).toBeNaN();
    expect(image.wTerm.planes).toBeNaN();
    expect(image.smearing.bandwidthLossFraction).toBeNaN();
  });
});

describe("few antennas", () => {
  it("two make one baseline, whose beam has no width along its fringes", async () => {
    const { image } = await forecastOf({
      antennas: [
        [0, 0, 0],
        [500, 0, 0],
      ],
      integrations: 1,
    });
    const { before } = image.weightings[0]!;
    expect(before.majorArcsec).toBeNaN();
    expect(image.coverage.before.longestSpacingWavelengths).toBeGreaterThan(0);
  });

  it("three in one integration have a beam and no plane to be off", async () => {
    const { image, measures } = await forecastOf({
      antennas: [
        [0, 0, 0],
        [500, 0, 0],
        [100, 400, 0],
      ],
      integrations: 1,
    });
    expect(image.weightings[0]!.before.majorArcsec).toBeGreaterThan(0);
    const geometry = measures.find(({ name }) => name === "geometry")!.table.object(0) as Record<
      string,
      unknown
    >;
    expect(geometry.ridge_antenna).toBeNull();
  });
});

describe("weights", () => {
  it("that are not finite, zero or negative are left out", async () => {
    const good = await forecastOf({ weight: ({ antenna2 }) => (antenna2 === 9 ? -5 : 2) });
    for (const bad of [Number.NaN, Number.POSITIVE_INFINITY, 0]) {
      const other = await forecastOf({ weight: ({ antenna2 }) => (antenna2 === 9 ? bad : 2) });
      expect(other.image.weightings).toEqual(good.image.weightings);
      expect(other.image.coverage).toEqual(good.image.coverage);
    }
  });

  it("of any scale give the same beams", async () => {
    const one = await forecastOf({ weight: () => 1 });
    for (const scale of [1e-30, 1e30]) {
      const other = await forecastOf({ weight: () => scale });
      other.image.weightings.forEach((result, i) => {
        const reference = one.image.weightings[i]!.before;
        expect(result.before.majorArcsec / reference.majorArcsec).toBeCloseTo(1, 6);
        expect(result.before.peakSidelobeFraction).toBeCloseTo(reference.peakSidelobeFraction, 6);
        expect(result.before.noiseJy / reference.noiseJy).toBeCloseTo(1, 5);
      });
    }
  });
});

describe("u, v, w", () => {
  it("that are not finite on some rows leave the others", async () => {
    const { image } = await forecastOf({
      uvw: (uvw, row) => (row.antenna1 === 2 ? [Number.NaN, uvw[1], uvw[2]] : uvw),
    });
    expect(image.weightings[0]!.before.majorArcsec).toBeGreaterThan(0);
    expect(image.wTerm.known).toBe(true);
  });

  it("that are zero on antennas at one place do not make the shortest spacing zero", async () => {
    const antennas = threeArms(900, 3);
    antennas.push([...antennas[0]!]);
    const { image } = await forecastOf({ antennas });
    expect(image.coverage.before.shortestSpacingWavelengths).toBeGreaterThan(100);
    expect(image.coverage.before.missingFluxFraction).toBeLessThan(0.9);
  });

  it("in metres where seconds are due are answered in good time, and named", async () => {
    const { measures, image } = await forecastOf({
      uvw: ([u, v, w]) => [u * 299792458, v * 299792458, w * 299792458],
    });
    const geometry = measures.find(({ name }) => name === "geometry")!.table.object(0) as Record<
      string,
      unknown
    >;
    expect(geometry.unit_fault).toBe("metres");
    expect(Number.isFinite(image.weightings[0]!.before.majorArcsec)).toBe(true);
  });
});

describe("w that a fixed delay zeroed", () => {
  it("is computed from the antenna positions, and the advice says what zeroing does not do", async () => {
    const whole = await forecastOf({ antennas: threeArms(900, 3, 1) });
    const zeroed = await forecastOf({ antennas: threeArms(900, 3, 1), uvw: ([u, v]) => [u, v, 0] });
    const [a, b] = [whole.image.wTerm, zeroed.image.wTerm];
    expect(b.known).toBe(true);
    expect(b.largestWavelengths / a.largestWavelengths).toBeCloseTo(1, 5);
    expect(b.edgeLossFraction).toBeCloseTo(a.edgeLossFraction, 5);
    expect(imageRow(zeroed.measures).w_zeroed).toBe(1);
    expect(zeroed.image.advice.find(({ name }) => name === "w in the file")!.why).toContain("no other");
    expect(whole.image.advice.some(({ name }) => name === "w in the file")).toBe(false);
  });

  it("is unknown where positions are missing too", async () => {
    const { survey } = observedArray({
      antennas: threeArms(900, 3),
      integrations: 4,
      uvw: ([u, v]) => [u, v, 0],
    });
    const nowhere: Survey = {
      ...survey,
      dataset: { ...survey.dataset, array: { ...survey.dataset.array, fromTable: false } },
    };
    const { image, measures } = await forecast(nowhere, derivePlan({}, nowhere));
    expect(image.wTerm.known).toBe(false);
    expect(image.wTerm.edgePhaseRad).toBeNaN();
    expect(imageRow(measures).w_known).toBe(0);
    expect(image.advice.find(({ name }) => name === "w term")!.value).toBe("unknown");
  });
});

describe("a dataset of several fields", () => {
  it("is forecast for the field with the largest weight", async () => {
    const { dataset } = CLEAN.fieldsAndGaps();
    const survey = await surveyDataset(dataset);
    const counts = new Map<number, number>();
    for (const field of survey.tracks.field) counts.set(field, (counts.get(field) ?? 0) + 1);
    const { measures } = await forecast(survey, derivePlan({}, survey));
    const weight = measures
      .find(({ name }) => name === "baseline_w")!
      .table.array("weight_fraction") as number[];
    // The baselines' shares add up to one field, not to two.
    expect(weight.reduce((sum, share) => sum + share, 0)).toBeCloseTo(1, 6);
    expect(counts.size).toBe(2);
  });
});

describe("amplitudes that are not calibrated", () => {
  it("have no noise in Jy, and the advice says why", async () => {
    const { survey } = observedArray({ antennas: threeArms(900, 3), integrations: 4 });
    const raw: Survey = { ...survey, dataset: { ...survey.dataset, unit: "uncalibrated" } };
    const { image, measures } = await forecast(raw, derivePlan({ targetRms: 1e-3 }, raw));
    expect(image.weightings[0]!.before.noiseJy).toBeNaN();
    expect(imageRow(measures).noise_ratio).toBeNaN();
    expect(imageRow(measures).noise_factor).toBeGreaterThanOrEqual(1);
    expect(image.advice.find(({ name }) => name === "Noise")!.why).toBe("the amplitudes are not in Jy");
  });
});

describe("forecastAfter", () => {
  it("sets the beams and coverage after flags beside those before", async () => {
    const { survey, dataset } = observedArray({ antennas: threeArms(900, 3), integrations: 6 });
    const plan = derivePlan({}, survey);
    const before = await forecast(survey, plan);
    const flagged = await surveyDataset(flaggedView(dataset, [{ ...EVERYTHING, antennas: [3] }]));
    const after = await forecast(flagged, plan);
    const joined = forecastAfter(before.image, after.image);
    joined.weightings.forEach((result, i) => {
      expect(result.before).toEqual(before.image.weightings[i]!.before);
      expect(result.after).toEqual(after.image.weightings[i]!.before);
    });
    expect(joined.coverage.after).toEqual(after.image.coverage.before);
    expect(joined.advice).toBe(before.image.advice);
  });
});
