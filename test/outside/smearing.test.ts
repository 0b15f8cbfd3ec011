/**
 * Smearing, summed visibility by visibility over a Gaussian coverage, against the closed forms for a Gaussian beam
 * (smearing.py) and against a telescope handbook's table (smearing-check-values.json, with the provenance of each).
 */
import { describe, expect, it } from "vitest";
import type { EdgeSamples } from "../../src/imaging/edge-samples.ts";
import { sinc, smearingAt } from "../../src/imaging/smearing.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface Reference {
  bandwidth: { beta: number; peak: number; averaged: number }[];
  time_at_pole: { theta_over_beam: number; tau_s: number; peak: number }[];
}
const reference = stored<Reference>("smearing");
interface Entry {
  id: string;
  inputs: { beta: number[]; x: number[] };
  expected: number[] & { exact_square: number };
}
const sheet = new Map(
  stored<{ entries: Entry[] }>("smearing-check-values").entries.map((entry) => [entry.id, entry]),
);

const FREQUENCY = 1.4e9;
/** Rms of the Gaussian coverage along each axis, wavelengths, and the width of its beam, radians. */
const SPREAD = 2000;
const BEAM = Math.sqrt(2 * Math.LN2) / (Math.PI * SPREAD);
/** A sum over a lattice of (u, v) of a function this smooth is as good as the integral. */
const TOLERANCE = 1e-6;

function gaussianCoverage(channelWidth: number, integration: number): EdgeSamples {
  const u: number[] = [];
  const v: number[] = [];
  const weight: number[] = [];
  for (let i = -48; i <= 48; i++) {
    for (let j = 0; j <= 48; j++) {
      if (j === 0 && i < 0) continue;
      const [x, y] = [(i / 8) * SPREAD, (j / 8) * SPREAD];
      u.push(x);
      v.push(y);
      // A point and its conjugate are one sample; the origin is its own.
      weight.push(Math.exp(-(x * x + y * y) / (2 * SPREAD * SPREAD)) * (i === 0 && j === 0 ? 0.5 : 1));
    }
  }
  const fill = (value: number) => new Float64Array(u.length).fill(value);
  return {
    count: u.length,
    share: 1,
    u: Float64Array.from(u),
    v: Float64Array.from(v),
    w: fill(0),
    weight: Float64Array.from(weight),
    natural: Float64Array.from(weight),
    frequency: fill(FREQUENCY),
    channelWidth: fill(channelWidth),
    integration: fill(integration),
    baseline: new Int32Array(u.length),
  };
}

describe("bandwidth smearing", () => {
  it.each(reference.bandwidth)("of beta $beta keeps $peak of the peak", ({ beta, peak, averaged }) => {
    expect(averaged).toBeCloseTo(peak, 9);
    const theta = 30 * BEAM;
    const width = (beta * BEAM * FREQUENCY) / theta;
    const result = smearingAt(gaussianCoverage(width, 0), theta, 0);
    expect(Math.abs(1 - result.bandwidthLossFraction - peak)).toBeLessThan(TOLERANCE);
    expect(Math.abs(1 - result.bandwidthLossMean - peak)).toBeLessThan(TOLERANCE);
  });

  it("agrees with the handbook's rounded table", () => {
    const { inputs, expected } = sheet.get("smear-handbook")!;
    inputs.beta.forEach((beta, i) => {
      const theta = 30 * BEAM;
      const result = smearingAt(gaussianCoverage((beta * BEAM * FREQUENCY) / theta, 0), theta, 0);
      expect(Math.abs(1 - result.bandwidthLossFraction - expected[i]!)).toBeLessThan(0.025);
    });
  });

  it("gives the channel width that loses no more than it says", () => {
    const theta = 30 * BEAM;
    const result = smearingAt(gaussianCoverage(2e7, 0), theta, 0);
    const safe = smearingAt(gaussianCoverage(result.safeChannelHz, 0), theta, 0);
    expect(safe.bandwidthLossFraction / result.safeLossFraction).toBeCloseTo(1, 2);
    // beta for a loss of 1 %, stored with the check values
    const beta = (result.safeChannelHz / FREQUENCY) * (theta / BEAM);
    expect(beta / sheet.get("smear-beta-for-loss")!.expected[0]!).toBeCloseTo(1, 2);
  });
});

describe("time-average smearing at the pole", () => {
  it.each(reference.time_at_pole)(
    "keeps $peak at $theta_over_beam beams and $tau_s s",
    ({ theta_over_beam, tau_s, peak }) => {
      const theta = theta_over_beam * BEAM;
      const result = smearingAt(gaussianCoverage(0, tau_s), theta, Math.PI / 2);
      expect(Math.abs(1 - result.timeLossFraction - peak)).toBeLessThan(TOLERANCE);
    },
  );

  it("agrees with the stored example", () => {
    const { expected } = sheet.get("time-smear-example")!;
    const result = smearingAt(gaussianCoverage(0, 10), 1000 * BEAM, Math.PI / 2);
    expect(1 - result.timeLossFraction).toBeCloseTo(expected.exact_square, 5);
  });
});

describe("sinc", () => {
  it("has the stored values", () => {
    const { inputs, expected } = sheet.get("smear-sinc")!;
    inputs.x.forEach((x, i) => {
      expect(sinc(x)).toBeCloseTo(expected[i]!, 10);
    });
    expect(sinc(0)).toBe(1);
  });
});

itIsFresh("smearing");
