import { describe, expect, it } from "vitest";
import {
  BUCKETS,
  RELATIVE_ERROR,
  rawBucket,
  sketchQuantile,
  windowStart,
} from "../../src/measure/buckets.ts";
import { exactQuantum, toMultiple } from "../../src/util/exact-sum.ts";
import {
  circularMean,
  MAD_TO_SIGMA,
  mad,
  median,
  modifiedZ,
  RAYLEIGH_MEDIAN,
  robustSigma,
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

function sketchOf(amplitudes: readonly number[], start: number): Uint32Array {
  const counts = new Uint32Array(BUCKETS);
  for (const amplitude of amplitudes) counts[rawBucket(amplitude * amplitude) - start]! += 1;
  return counts;
}

/** A float32 power rounds by 2^-24, its root by half of that. */
const FLOAT32 = 2 ** -24;

describe("sketch quantiles", () => {
  // NumPy's quantile by the method "lower": the sample of rank floor(q (n - 1)).
  it.each(Object.keys(reference["numpy.quantile"]))(
    "agree with NumPy within the proven relative error: %s",
    (name) => {
      const { values, q, expected } = reference["numpy.quantile"][name]!;
      const start = windowStart(median(values) ** 2);
      for (const [i, share] of q.entries()) {
        const said = sketchQuantile(sketchOf(values, start), 0, start, share);
        expect(Math.abs(said / expected[i]! - 1)).toBeLessThan(RELATIVE_ERROR + FLOAT32);
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
    const start = windowStart(1);
    const said = sketchQuantile(sketchOf(amplitudes, start), 0, start, 0.5);
    expect(Math.abs(said / expected - 1)).toBeLessThan(RELATIVE_ERROR + 0.003);
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
  // NIST Statistical Reference Datasets, univariate: certified means and standard deviations. The quantum leaves at least
  // 2^52 / n steps below the largest value, so a mean is good to 2^-52 n of that value.
  it.each(Object.keys(series))("give the certified mean and standard deviation of %s in any order", (id) => {
    const values = series[id]!;
    const n = values.length;
    const quantum = exactQuantum(Math.max(...values.map(Math.abs)), n);
    const sum = (terms: readonly number[]) =>
      terms.reduce((total, term) => total + toMultiple(term, quantum), 0);
    const mean = sum(values) / n;
    expect(Math.abs(mean / entry(id).expected.mean! - 1)).toBeLessThan(n * 2 ** -50);
    expect(sum([...values].reverse())).toBe(sum(values));
    const squares = values.map((value) => (value - mean) ** 2);
    const fine = exactQuantum(Math.max(...squares), n);
    const deviation = Math.sqrt(squares.reduce((total, term) => total + toMultiple(term, fine), 0) / (n - 1));
    // NumAcc4's inputs round to doubles 1.9e-9 apart: no method can have more than 7 digits.
    expect(Math.abs(deviation / entry(id).expected.sd! - 1)).toBeLessThan(1e-7);
  });
});

itIsFresh("measures");
