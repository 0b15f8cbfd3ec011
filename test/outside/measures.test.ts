import { describe, expect, it } from "vitest";
import { ExactSums } from "../../src/measure/exact-sums.ts";
import { sharingLadder } from "../../src/measure/sharing-ladder.ts";
import { SketchBank } from "../../src/measure/sketch-bank.ts";
import { TIME_STEP_DAYS } from "../../src/measure/time-order.ts";
import {
  circularMean,
  MAD_TO_SIGMA,
  mad,
  median,
  modifiedZ,
  RAYLEIGH_MEDIAN,
  robustSigma,
  standardDeviation,
} from "../../src/util/statistics.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface Reference {
  "numpy.quantile": Record<string, { values: number[]; q: number[]; expected: number[] }>;
  "scipy.stats.rayleigh": { amplitudes: number[]; median: number };
  "scipy.stats.rice": Record<string, { amplitudes: number[]; median: number }>;
  "scipy.stats.median_abs_deviation": Record<
    string,
    { values: number[]; median: number; mad: number; sigma: number }
  >;
  "scipy.stats.circmean": Record<
    string,
    { degrees: number[]; mean: number; variance: number; deviation: number }
  >;
}
const reference = stored<Reference>("measures");

interface Entry {
  id: string;
  inputs: { series?: string | number[]; x?: number[] };
  expected: Record<string, number> & { modified_z?: number[] };
}
const checkValues = stored<{ entries: Entry[] }>("statistics-check-values").entries;
const entry = (id: string) => checkValues.find((one) => one.id === id)!;

/** The amplitudes in a bank of one sketch, with as many buckets as those of the survey. */
function sketchOf(amplitudes: readonly number[]): SketchBank {
  const bank = new SketchBank(sharingLadder({ subbands: 1, channels: 1, polarizations: 1 }), 5, 1e6, 1);
  const bits = new Int32Array(Float32Array.from(amplitudes).buffer);
  for (let i = 0; i < bits.length; i++) bank.add(0, bits, i);
  return bank;
}

/** A float32 rounds by 2^-24. */
const FLOAT32 = 2 ** -24;

describe("sketch quantiles", () => {
  // NumPy's quantile by the method "lower": the sample of rank floor(q (n - 1)).
  it.each(Object.keys(reference["numpy.quantile"]))(
    "agree with NumPy within the proven relative error: %s",
    (name) => {
      const { values, q, expected } = reference["numpy.quantile"][name]!;
      const bank = sketchOf(values);
      for (const [i, share] of q.entries()) {
        const said = bank.quantile(0, 0, share);
        expect(Math.abs(said / expected[i]! - 1)).toBeLessThan(bank.relativeError + FLOAT32);
      }
    },
  );

  // SciPy's Rayleigh and Rice distributions; 400 evenly spaced shares move the median by less than 0.3 %.
  it.each([
    ["Rayleigh", reference["scipy.stats.rayleigh"]],
    ...Object.entries(reference["scipy.stats.rice"]).map(
      ([nu, rice]) => [`Rice, nu/sigma ${nu}`, rice] as const,
    ),
  ] as const)("give the median amplitude of a %s distribution", (_, { amplitudes, median: expected }) => {
    const bank = sketchOf(amplitudes);
    expect(Math.abs(bank.quantile(0, 0, 0.5) / expected - 1)).toBeLessThan(bank.relativeError + 0.003);
    // Inside the bucket by rank, the shape of the bucket's edges is all that is left.
    expect(Math.abs(bank.smoothQuantile(0, 0, 0.5) / expected - 1)).toBeLessThan(0.006);
  });

  // The sheet's worked example, 1 to 100: exact order statistics of rank floor(q (n - 1)).
  it("agree with the worked example of log buckets", () => {
    const bank = sketchOf(Array.from({ length: 100 }, (_, i) => i + 1));
    const expected = entry("ddsketch-quantiles").expected as unknown as Record<
      string,
      { lower_exact: number }
    >;
    for (const [share, { lower_exact }] of Object.entries(expected)) {
      const said = bank.quantile(0, 0, Number(share));
      expect(Math.abs(said / lower_exact - 1)).toBeLessThan(bank.relativeError + FLOAT32);
    }
  });

  it("know SciPy's median of a Rayleigh distribution", () => {
    expect(RAYLEIGH_MEDIAN).toBeCloseTo(reference["scipy.stats.rayleigh"].median, 12);
  });
});

describe("robust statistics", () => {
  it.each(Object.keys(reference["scipy.stats.median_abs_deviation"]))("agree with SciPy: %s", (name) => {
    const {
      values,
      median: middle,
      mad: deviation,
      sigma,
    } = reference["scipy.stats.median_abs_deviation"][name]!;
    expect(median(values)).toBeCloseTo(middle, 12);
    expect(mad(values)).toBeCloseTo(deviation, 12);
    // SciPy divides by its own Phi^-1(3/4).
    expect(robustSigma(values) / sigma).toBeCloseTo(1, 12);
  });

  // SciPy's norm.ppf, as computed for the check values.
  it("scale a MAD to sigma as a normal distribution does", () => {
    expect(MAD_TO_SIGMA).toBeCloseTo(entry("mad-normal").expected.mad_to_sigma!, 11);
  });

  // Iglewicz & Hoaglin 1993 (recalled): modified z; their constant 0.6745 has four digits, ours is exact.
  it.each(["modified-z-odd", "modified-z-even"])("give the modified z of Iglewicz and Hoaglin: %s", (id) => {
    const { inputs, expected } = entry(id);
    const said = modifiedZ(inputs.x!);
    for (const [i, z] of expected.modified_z!.entries()) {
      expect(Math.abs(said[i]! - z)).toBeLessThanOrEqual(2e-5 * Math.abs(z));
    }
  });

  it("fall back to the mean deviation where the MAD is 0", () => {
    const said = modifiedZ(entry("modified-z-zero-mad").inputs.x!);
    const expected = entry("modified-z-zero-mad").expected["modified_z_of_9_with_1.253314_meanAD"]!;
    expect(said.at(-1)).toBeCloseTo(expected, 5);
  });
});

describe("circular statistics", () => {
  it.each(Object.keys(reference["scipy.stats.circmean"]))("agree with SciPy: %s", (name) => {
    const { degrees, mean, variance, deviation } = reference["scipy.stats.circmean"][name]!;
    const said = circularMean(degrees.map((angle) => (angle * Math.PI) / 180));
    expect((said.mean * 180) / Math.PI).toBeCloseTo(mean, 9);
    expect(1 - said.resultant).toBeCloseTo(variance, 12);
    expect((said.deviation * 180) / Math.PI).toBeCloseTo(deviation, 9);
  });

  it("have no resultant for angles spread evenly", () => {
    const { inputs, expected } = entry("circular-c") as unknown as {
      inputs: { angles_deg: number[] };
      expected: { circular_variance: number };
    };
    const said = circularMean(inputs.angles_deg.map((angle) => (angle * Math.PI) / 180));
    expect(1 - said.resultant).toBeCloseTo(expected.circular_variance, 12);
  });
});

// NumPy's spacing of float32 at 0.6 day.
it("times a float32 step apart are one integration", () => {
  const { expected } = entry("float32-dayfraction-spacing") as unknown as { expected: number };
  expect(TIME_STEP_DAYS * 86_400).toBeGreaterThan(expected);
  expect(TIME_STEP_DAYS * 86_400).toBeLessThan(1.02 * expected);
});

describe("exact sums", () => {
  const series: Record<string, number[]> = {
    "nist-NumAcc1": [10000001, 10000003, 10000002],
    "nist-NumAcc2": [1.2, ...Array.from({ length: 500 }, () => [1.1, 1.3]).flat()],
    "nist-NumAcc3": [1000000.2, ...Array.from({ length: 500 }, () => [1000000.1, 1000000.3]).flat()],
    "nist-NumAcc4": [10000000.2, ...Array.from({ length: 500 }, () => [10000000.1, 10000000.3]).flat()],
    "nist-Lew": entry("nist-Lew").inputs.series as number[],
    "nist-Michelso": entry("nist-Michelso").inputs.series as number[],
  };
  // NIST Statistical Reference Datasets, univariate: certified means and standard deviations.
  it.each(Object.keys(series))("give the certified mean and standard deviation of %s in any order", (id) => {
    const values = series[id]!;
    const n = values.length;
    const sum = (terms: readonly number[]) => {
      const sums = new ExactSums(1);
      for (const term of terms) sums.add(0, term);
      return sums.value(0);
    };
    const mean = sum(values) / n;
    // A rounding of the inputs, of the sum's lowest piece and of the quotient.
    expect(Math.abs(mean / entry(id).expected.mean! - 1)).toBeLessThan(4 * Number.EPSILON);
    expect(sum([...values].reverse())).toBe(sum(values));
    // NumAcc4's inputs round to doubles 1.9e-9 apart: no method can have more than 7 digits.
    expect(Math.abs(standardDeviation(values) / entry(id).expected.sd! - 1)).toBeLessThan(1e-7);
  });

  // Merging of moments by Chan, Golub & LeVeque 1979, which a sum that merges exactly must agree with.
  it("merge to the mean of all", () => {
    const { a, b } = entry("variance-merge").inputs as unknown as Record<"a" | "b", number[]>;
    const [left, right] = [new ExactSums(1), new ExactSums(1)];
    for (const value of a) left.add(0, value);
    for (const value of b) right.add(0, value);
    left.merge(0, right, 0);
    expect(left.value(0) / (a.length + b.length)).toBeCloseTo(entry("variance-merge").expected.mean!, 5);
    const deviation = standardDeviation([...a, ...b]);
    expect(deviation ** 2).toBeCloseTo(entry("variance-merge").expected.sample_variance!, 8);
  });
});

itIsFresh("measures");
