import { describe, expect, it } from "vitest";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { directBeam, directWeights } from "./direct-beam.ts";
import { type Observed, observedArray, threeArms } from "./observed-array.ts";

const ARCSEC = Math.PI / 180 / 3600;

/** Every sample at its own channel, in wavelengths, both products added. */
function samplesOf(observed: Observed, weight: number) {
  const u: number[] = [];
  const v: number[] = [];
  const weights: number[] = [];
  for (const row of observed.rows) {
    for (const frequency of observed.frequencies) {
      u.push(row.u * frequency);
      v.push(row.v * frequency);
      weights.push(weight);
    }
  }
  return { u, v, weight: weights };
}

describe("forecast", () => {
  const observed = observedArray({ antennas: threeArms(900, 4), integrations: 24, channels: 3 });
  const plan = derivePlan({ fieldOfView: 1800 * ARCSEC }, observed.survey);

  it("finds the beams that a direct sum has", async () => {
    const { image } = await forecast(observed.survey, plan);
    const samples = samplesOf(observed, 8);
    for (const result of image.weightings) {
      const weighting = result.weighting === "robust" ? { robust: result.robust! } : result.weighting;
      const imaging = directWeights(samples, plan.fieldOfView.value, weighting);
      const beam = result.before;
      const pa = (beam.positionAngleDeg * Math.PI) / 180;
      const along = (angle: number, width: number) =>
        directBeam(samples, imaging, (Math.sin(angle) * width) / 2, (Math.cos(angle) * width) / 2);
      // The fitted ellipse runs along the half-maximum contour.
      expect(along(pa, beam.majorArcsec * ARCSEC)).toBeCloseTo(0.5, 1.7);
      expect(along(pa + Math.PI / 2, beam.minorArcsec * ARCSEC)).toBeCloseTo(0.5, 1.7);
      const worst = directBeam(
        samples,
        imaging,
        beam.peakSidelobeEastArcsec * ARCSEC,
        beam.peakSidelobeNorthArcsec * ARCSEC,
      );
      expect(worst).toBeCloseTo(beam.peakSidelobeFraction, 3);
    }
  });

  it("predicts the noise that weights and measured noise mean", async () => {
    const { image } = await forecast(observed.survey, plan);
    const samples = samplesOf(observed, 8);
    for (const result of image.weightings) {
      const weighting = result.weighting === "robust" ? { robust: result.robust! } : result.weighting;
      const imaging = directWeights(samples, plan.fieldOfView.value, weighting);
      const total = imaging.reduce((sum, t) => sum + t, 0);
      // Two products of noise 0.5 Jy in each sample.
      const squares = imaging.reduce((sum, t) => sum + (t * t * 0.25) / 2, 0);
      expect(result.before.noiseJy / (Math.sqrt(squares) / total)).toBeCloseTo(1, 4);
    }
  });

  it("is the same whatever the size of the blocks", async () => {
    const other = observedArray({ antennas: threeArms(900, 4), integrations: 24, channels: 3, blockRows: 7 });
    const a = await forecast(observed.survey, plan);
    const b = await forecast(other.survey, plan);
    expect(JSON.stringify(b.image)).toBe(JSON.stringify(a.image));
    expect(b.picture?.pixels).toEqual(a.picture?.pixels);
  });
});
