/**
 * What a forecast takes beyond reading: 351 baselines, 60 integrations, 32 channels (0.67 million places in the uv plane),
 * for a narrow field, a field of 100 beams and one of 400, beside a bare pass over the same weights.
 */
import { bench, describe } from "vitest";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { observedArray, threeArms } from "./observed-array.ts";

const observed = observedArray({
  antennas: threeArms(3000, 9, 2),
  integrations: 60,
  channels: 32,
  blockRows: 512,
});
const { survey, dataset } = observed;
const resolution = derivePlan({}, survey).resolution.value;

describe("a forecast", () => {
  bench("a bare pass over the weights", async () => {
    let sum = 0;
    for await (const block of dataset.blocks({ want: "weights" })) sum += block.weight[0]!;
    if (!(sum > 0)) throw new Error("no weights");
  });

  for (const beams of [20, 100, 400]) {
    const plan = derivePlan({ fieldOfView: beams * resolution, correctsW: true }, survey);
    bench(`a field of ${beams} beams`, async () => {
      const { image } = await forecast(survey, plan);
      if (!(image.weightings[0]!.before.majorArcsec > 0)) throw new Error("no beam");
    });
  }

  const plan = derivePlan({ fieldOfView: 100 * resolution, correctsW: true }, survey);
  const base = forecast(survey, plan);
  bench("the cost of ten flags, a field of 100 beams", async () => {
    const antennas = Array.from({ length: 10 }, (_, i) => ({ ...EVERYTHING, antennas: [i + 1] }));
    const costs = await (await base).costs(antennas);
    if (!costs.every(({ sensitivityLossFraction }) => sensitivityLossFraction > 0))
      throw new Error("no cost");
  });
});
