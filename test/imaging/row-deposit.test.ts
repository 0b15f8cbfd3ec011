import { describe, expect, it } from "vitest";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { fillNodeWeights, lagrangeCoefficients } from "../../src/imaging/run-nodes.ts";
import { directBeam, directWeights } from "./direct-beam.ts";
import { observedArray, threeArms } from "./observed-array.ts";

describe("the nodes of a run of channels", () => {
  it("have the moments of the run, whatever its weights", () => {
    const nodes = 6;
    const coefficients = lagrangeCoefficients(nodes);
    const channels = [0, 1, 2, 5, 6, 7, 8, 12, 13];
    const weight = [1, 0.5, 3, 2, 2, 0.1, 1, 1, 4];
    const span = channels.at(-1)!;
    const sums = Float64Array.from({ length: nodes }, (_, k) =>
      channels.reduce((sum, t, i) => sum + weight[i]! * t ** k, 0),
    );
    const weights = new Float64Array(nodes);
    fillNodeWeights(coefficients, sums, span, weights);
    for (let k = 0; k < nodes; k++) {
      const moment = weights.reduce((sum, value, j) => sum + value * ((span * j) / (nodes - 1)) ** k, 0);
      expect(moment / sums[k]!).toBeCloseTo(1, 9);
    }
  });
});

describe("many narrow channels, gathered into runs", () => {
  it("give the beam of every channel at its own (u, v)", async () => {
    // Channels so narrow that a uv cell holds tens of them, some flagged.
    const observed = observedArray({
      antennas: threeArms(500, 3),
      integrations: 6,
      channels: 96,
      channelWidth: 2e5,
      polarizations: ["I"],
      weight: (_, __, channel) => (channel % 11 === 3 ? 0 : 1 + (channel % 4)),
    });
    const plan = derivePlan({ fieldOfView: 0.008, weighting: { kind: "uniform" } }, observed.survey);
    const { image } = await forecast(observed.survey, plan);
    const samples = { u: [] as number[], v: [] as number[], weight: [] as number[] };
    for (const row of observed.rows) {
      observed.frequencies.forEach((frequency, channel) => {
        if (channel % 11 === 3) return;
        samples.u.push(row.u * frequency);
        samples.v.push(row.v * frequency);
        samples.weight.push(1 + (channel % 4));
      });
    }
    const imaging = directWeights(samples, 0.008, "uniform");
    const beam = image.weightings.find((result) => result.planned)!.before;
    const arcsec = Math.PI / 180 / 3600;
    const direct = directBeam(
      samples,
      imaging,
      beam.peakSidelobeEastArcsec * arcsec,
      beam.peakSidelobeNorthArcsec * arcsec,
    );
    expect(Math.abs(direct - beam.peakSidelobeFraction)).toBeLessThan(1e-3);
  });
});
