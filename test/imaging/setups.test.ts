import { describe, expect, it } from "vitest";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { gridRows, memoryDataset } from "../support/memory-dataset.ts";

/** Rows of one setup, or of both at the same times; the second is at twice the frequency, in channels 4 times as wide. */
function dataset(setupsOfRows: readonly number[]) {
  const setups = [
    { id: 1, frequencies: Float64Array.of(1.4e9, 1.401e9), channelWidths: Float64Array.of(1e6) },
    { id: 2, frequencies: Float64Array.of(2.8e9, 2.804e9), channelWidths: Float64Array.of(4e6) },
  ];
  const rows = gridRows(8, 30, 60).flatMap((row) => setupsOfRows.map((setup) => ({ ...row, setup })));
  return memoryDataset({ rows, channels: 2, polarizations: ["I"], dataset: { setups } });
}

async function forecastOf(setups: readonly number[]) {
  const survey = await surveyDataset(dataset(setups));
  const { image } = await forecast(survey, derivePlan({ fieldOfView: 0.02, resolution: 1e-3 }, survey));
  return image;
}

describe("frequency setups", () => {
  it("all count in the coverage, the beam and the smearing", async () => {
    const [low, high, both] = await Promise.all([[0], [1], [0, 1]].map(forecastOf));
    const longest = (image: typeof low) => image!.coverage.before.longestSpacingWavelengths;
    const shortest = (image: typeof low) => image!.coverage.before.shortestSpacingWavelengths;
    expect(longest(both)).toBeCloseTo(longest(high), 6);
    expect(shortest(both)).toBeCloseTo(shortest(low), 6);
    expect(longest(high) / longest(low)).toBeCloseTo(2, 2);
    // Loss goes with channel width over frequency: the setup of wide channels loses more, both together in between.
    const loss = (image: typeof low) => image!.smearing.bandwidthLossFraction;
    expect(loss(high)).toBeGreaterThan(loss(low));
    expect(loss(both)).toBeGreaterThan(loss(low));
    expect(loss(both)).toBeLessThan(loss(high));
    const major = (image: typeof low) => image!.weightings.find(({ planned }) => planned)!.before.majorArcsec;
    expect(major(both)).toBeLessThan(major(low));
    expect(major(both)).toBeGreaterThan(major(high));
  });
});
