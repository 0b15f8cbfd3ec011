/**
 * Predicted image noise against simulated images (noise.py) and the radiometer equation (noise-check-values.json, with the
 * provenance of each).
 */
import { describe, expect, it } from "vitest";
import { cellFactors, imageNoise } from "../../src/imaging/cell-weights.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { MomentGrid } from "../../src/imaging/moment-grid.ts";
import { observedArray, threeArms } from "../imaging/observed-array.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

const reference = stored<{
  u: number[];
  v: number[];
  sigma: number[];
  images: Record<"true" | "equal", { rms: number; formula: number }>;
  radiometer_image_jy: number;
  sefd_jy: number;
}>("noise");
interface Entry {
  id: string;
  inputs: Record<string, number> & { weights_per_jy2: number[] };
  expected: number & Record<string, number>;
}
const sheet = new Map(
  stored<{ entries: Entry[] }>("noise-check-values").entries.map((entry) => [entry.id, entry]),
);
const natural = { kind: "natural" } as const;

function naturalNoiseOf(
  u: readonly number[],
  v: readonly number[],
  weight: readonly number[],
  sigma: readonly number[],
) {
  const grid = new MomentGrid({ field: 0.02, half: 400, order: 0, weightBound: 1e5, noiseBound: 1e5 });
  for (const [i, value] of weight.entries()) grid.add(u[i]!, v[i]!, value, value ** 2 * sigma[i]! ** 2);
  expect(grid.outside).toBe(0);
  const cells = grid.cells();
  return imageNoise(cells, cellFactors(cells, natural));
}

describe("image noise", () => {
  it.each(["true", "equal"] as const)("is that of simulated images, weights %s", (weights) => {
    const { u, v, sigma, images } = reference;
    const weight = sigma.map((value) => (weights === "true" ? 1 / value ** 2 : 1));
    const predicted = naturalNoiseOf(u, v, weight, sigma);
    expect(predicted / images[weights].formula).toBeCloseTo(1, 9);
    // 30000 values give the simulated rms to half a per cent.
    expect(Math.abs(predicted / images[weights].rms - 1)).toBeLessThan(0.02);
  });

  it("is that of the worked example", () => {
    const { inputs, expected } = sheet.get("weights-to-rms")!;
    const weight = inputs.weights_per_jy2;
    const sigma = weight.map((value) => 1 / Math.sqrt(value));
    const places = weight.map((_, i) => 1000 * i);
    expect(naturalNoiseOf(places, places, weight, sigma) / expected.natural_rms!).toBeCloseTo(1, 9);
    const equal = weight.map(() => 1);
    expect(naturalNoiseOf(places, places, equal, sigma) / expected.equal_weight_rms!).toBeCloseTo(1, 9);
  });

  it("is the radiometer equation's for identical antennas", async () => {
    const { inputs, expected } = sheet.get("radiometer-image")!;
    expect(reference.radiometer_image_jy / expected).toBeCloseTo(1, 9);
    const { sefd_jy, eta, antennas, n_pol, bandwidth_hz, time_s } = inputs;
    const [integrations, channels] = [12, 4];
    const seconds = time_s! / integrations;
    const width = bandwidth_hz! / channels;
    const observed = observedArray({
      antennas: threeArms(800, antennas! / 3),
      integrations,
      integrationTime: seconds,
      channels,
      channelWidth: width,
      frequency: 5e9,
      polarizations: n_pol === 2 ? ["RR", "LL"] : ["RR"],
      sigma: sefd_jy! / (eta! * Math.sqrt(2 * width * seconds)),
    });
    const plan = derivePlan({ weighting: natural, fieldOfView: 0.002 }, observed.survey);
    const { image, measures } = await forecast(observed.survey, plan);
    const beam = image.weightings.find((result) => result.planned)!.before;
    expect(beam.noiseJy / expected).toBeCloseTo(1, 5);
    // The measured noise gives the SEFD back, the correlator's efficiency in it.
    const row = measures.find((measure) => measure.name === "image")!.table.object(0) as Record<
      string,
      number
    >;
    expect((row.sefd_jy! * eta!) / sefd_jy!).toBeCloseTo(1, 5);
  });

  it("has the check sheet's SEFD by SciPy's constants", () => {
    expect(reference.sefd_jy / sheet.get("sefd-from-tsys")!.expected).toBeCloseTo(1, 7);
  });
});

itIsFresh("noise", 1e-6);
