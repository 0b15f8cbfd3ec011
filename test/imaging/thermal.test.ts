import { describe, expect, it } from "vitest";
import { samplingOf } from "../../src/imaging/sampling.ts";
import { brightness, fillWeightedVariance, measuredSefd, naturalNoise } from "../../src/imaging/thermal.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import type { Survey } from "../../src/measure/survey-result.ts";
import { simulated, TRAPS } from "../support/scenarios.ts";
import { observedArray, threeArms } from "./observed-array.ts";

const observed = observedArray({ antennas: threeArms(900, 3), integrations: 10, channels: 2, sigma: 0.5 });

function withSigma(sigma: (at: number) => number): Survey {
  const { survey } = observed;
  return { ...survey, levels: { ...survey.levels, sigma: survey.levels.sigma.map((_, at) => sigma(at)) } };
}

describe("noise of samples", () => {
  it("times the weight is the same for all where weights are true", () => {
    const variance = fillWeightedVariance(samplingOf(observed.survey));
    for (const value of variance) expect(value).toBeCloseTo(1, 6);
  });

  it("is that of most where a baseline's is unknown or exactly zero", () => {
    const unknown = fillWeightedVariance(
      samplingOf(withSigma((at) => (at < 8 ? (at < 4 ? Number.NaN : 0) : 0.5))),
    );
    for (const value of unknown) expect(value).toBeCloseTo(1, 6);
  });

  it("is unknown where nothing tells it", () => {
    const variance = fillWeightedVariance(samplingOf(withSigma(() => Number.NaN)));
    expect(variance.every(Number.isNaN)).toBe(true);
    expect(naturalNoise(samplingOf(withSigma(() => Number.NaN)))).toBeNaN();
  });
});

describe("naturalNoise", () => {
  it("is sigma over the root of the number of samples", () => {
    expect(naturalNoise(samplingOf(observed.survey))).toBeCloseTo(0.5 / Math.sqrt(36 * 10 * 2 * 2), 7);
  });
});

describe("the SEFD of the measured noise", () => {
  it("is that of the simulated antennas", async () => {
    const { dataset } = simulated({ time: { duration: "10min" } });
    const sefd = measuredSefd(samplingOf(await surveyDataset(dataset)));

    expect(Math.abs(sefd / 400 - 1)).toBeLessThan(0.02);
  });

  it("is unknown for amplitudes that are not in Jy", () => {
    const { survey } = observed;
    expect(
      measuredSefd(samplingOf({ ...survey, dataset: { ...survey.dataset, unit: "uncalibrated" } })),
    ).toBeNaN();
  });
});

describe("brightness", () => {
  it("is the amplitude of a bright source, and 0 of noise", async () => {
    const bright = samplingOf(await surveyDataset(simulated({ sky: [{ flux: "3Jy" }] }).dataset));
    expect(Math.abs(brightness(bright) / 3 - 1)).toBeLessThan(0.02);
    expect(brightness(samplingOf(await surveyDataset(TRAPS.noiseAlone().dataset)))).toBe(0);
  });
});
