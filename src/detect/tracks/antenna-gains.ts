/** Antenna gains from baseline ratios, ln|g_i| + ln|g_j|, robustly; the median antenna is taken to keep its gain. */
import { median } from "../../util/statistics.ts";
import { type AntennaPhases, discountLone } from "./antenna-phases.ts";

/** Arrays by baseline. */
export interface BaselineRatios {
  readonly first: Int32Array;
  readonly second: Int32Array;
  /** natural logarithms */
  readonly value: Float64Array;
  /** 1 / variance; 0: not measured */
  readonly weight: Float64Array;
}

const SWEEPS = 10;

/** @returns as `phase` the logarithm of each antenna's gain; NaN where no baseline tells */
export function antennaGains(ratios: BaselineRatios, antennas: number, thorough = false): AntennaPhases {
  const { first, second, value, weight } = ratios;
  const gain = new Float64Array(antennas);
  const trust = weight.slice();
  const sum = new Float64Array(antennas);
  const total = new Float64Array(antennas);
  // What all share is the sky's.
  const common = median(value.filter((_, b) => weight[b]! > 0));
  const residual = (b: number) => value[b]! - common - gain[first[b]!]! - gain[second[b]!]!;
  const sweeps = thorough ? 2 * SWEEPS : SWEEPS;
  for (let sweep = 0; sweep < sweeps; sweep++) {
    sum.fill(0);
    total.fill(0);
    for (let b = 0; b < first.length; b++) {
      const w = trust[b]!;
      if (!(w > 0)) continue;
      sum[first[b]!]! += w * (value[b]! - common - gain[second[b]!]!);
      sum[second[b]!]! += w * (value[b]! - common - gain[first[b]!]!);
      total[first[b]!]! += w;
      total[second[b]!]! += w;
    }
    for (let a = 0; a < antennas; a++) {
      if (total[a]! > 0) gain[a] = 0.5 * gain[a]! + (0.5 * sum[a]!) / total[a]!;
    }
    if (thorough ? sweep < 2 || sweep >= sweeps - 2 : sweep !== 2 && sweep !== 5) continue;
    const scaled: number[] = [];
    for (let b = 0; b < first.length; b++) {
      if (weight[b]! > 0) scaled.push(Math.abs(residual(b)) * Math.sqrt(weight[b]!));
    }
    const scale = 2.5 * Math.max(1, 1.4826 * median(scaled));
    for (let b = 0; b < first.length; b++) {
      if (weight[b]! > 0) trust[b] = weight[b]! / (1 + (residual(b) ** 2 * weight[b]!) / scale ** 2);
    }
  }
  return describe(ratios, gain, residual);
}

function describe(
  { first, second, weight }: BaselineRatios,
  gain: Float64Array,
  residual: (b: number) => number,
): AntennaPhases {
  const antennas = gain.length;
  const total = new Float64Array(antennas);
  const chi = new Float64Array(antennas);
  const count = new Float64Array(antennas);
  const agreement = new Float64Array(antennas);
  for (let b = 0; b < first.length; b++) {
    const w = weight[b]!;
    if (!(w > 0)) continue;
    const delta = Math.abs(residual(b));
    for (const a of [first[b]!, second[b]!]) {
      total[a]! += w;
      chi[a]! += Math.min(w * delta * delta, 10 + 0.1 * w);
      count[a]! += 1;
      if (delta * delta * w < 9 || delta < 0.5 * Math.abs(gain[a]!)) agreement[a]! += w;
    }
  }
  const shares = agreement.map((sum, a) => (total[a]! > 0 ? sum / total[a]! : 0));
  discountLone({ first, second, weight }, total, shares);
  const known = gain.map((value, a) => (total[a]! > 0 ? value : Number.NaN));
  const middle = median(known);
  return {
    phase: known.map((value) => value - middle),
    error: known.map((_, a) =>
      total[a]! > 0 ? Math.sqrt(Math.max(1, chi[a]! / Math.max(1, count[a]! - 1)) / total[a]!) : Number.NaN,
    ),
    agreement: shares,
  };
}
