/**
 * Antenna phases and gains against SciPy's robust least squares (antenna-solution.py: scipy.optimize.least_squares with the
 * Cauchy loss), and against the plain least squares of a worked example (antenna-solution-check-values.json, NumPy).
 */
import { describe, expect, it } from "vitest";
import { antennaGains } from "../../src/detect/tracks/antenna-gains.ts";
import { antennaPhases } from "../../src/detect/tracks/antenna-phases.ts";
import { median } from "../../src/util/statistics.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface Case {
  antennas: number;
  sigma: number;
  values: number[];
  solution: number[];
}
const reference = stored<{ phases: Case[]; gains: Case[] }>("antenna-solution");

function pairs(antennas: number): { first: Int32Array; second: Int32Array } {
  const first: number[] = [];
  const second: number[] = [];
  for (let i = 0; i < antennas; i++) {
    for (let j = i + 1; j < antennas; j++) {
      first.push(i);
      second.push(j);
    }
  }
  return { first: Int32Array.from(first), second: Int32Array.from(second) };
}

function phasesOf(antennas: number, values: readonly number[], sigma: number, thorough: boolean) {
  return antennaPhases(
    {
      ...pairs(antennas),
      real: Float64Array.from(values, Math.cos),
      imag: Float64Array.from(values, Math.sin),
      weight: new Float64Array(values.length).fill(1 / sigma ** 2),
    },
    antennas,
    thorough,
  );
}

describe("antennaPhases against SciPy", () => {
  it.each(reference.phases)("agrees to a tenth of the noise: $antennas antennas", (one) => {
    const { phase } = phasesOf(one.antennas, one.values, one.sigma, true);
    expect(one.solution).toHaveLength(one.antennas);
    for (const [a, expected] of one.solution.entries()) {
      expect(Math.abs(phase[a]! - expected)).toBeLessThan(0.1 * one.sigma);
    }
  });

  it("is plain least squares where nothing is out by more than its error", () => {
    const [example] = stored<{
      entries: {
        inputs: { baseline_phases_deg: Record<string, number> };
        expected: { antenna_phases_deg: number[] };
      }[];
    }>("antenna-solution-check-values").entries;
    const phases = Object.values(example!.inputs.baseline_phases_deg).map((x) => (x * Math.PI) / 180);
    const { phase } = phasesOf(4, phases, 1, true);
    for (const [a, expected] of example!.expected.antenna_phases_deg.entries()) {
      expect(Math.abs(((phase[a]! - phase[0]!) * 180) / Math.PI - expected)).toBeLessThan(0.1);
    }
  });
});

describe("antennaGains against SciPy", () => {
  it.each(reference.gains)("agrees to a tenth of the noise: $antennas antennas", (one) => {
    const { phase } = antennaGains(
      {
        ...pairs(one.antennas),
        value: Float64Array.from(one.values),
        weight: new Float64Array(one.values.length).fill(1 / one.sigma ** 2),
      },
      one.antennas,
      true,
    );
    // A factor common to all baselines is the sky's here: it turns up in the median, which is taken off.
    for (const [a, expected] of one.solution.entries()) {
      expect(Math.abs(phase[a]! - expected)).toBeLessThan(0.1 * one.sigma);
    }
    expect(median(phase)).toBeCloseTo(0, 12);
  });
});

describe("the stored values", () => {
  itIsFresh("antenna-solution", 1e-6);
});
