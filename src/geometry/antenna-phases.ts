/** Phases and amplitudes of antennas from those of baselines, for a source that looks the same on all of them. */
import type { Graph } from "./antenna-coordinates.ts";

/** Visibilities; (pairs) each, in the order of the graph. */
export interface BaselineValues {
  readonly graph: Graph;
  readonly real: Float64Array;
  readonly imag: Float64Array;
  /** 0 where there is none */
  readonly weight: Float64Array;
}

export interface Phasors {
  /** (antennas) unit phasors; 0 where the antenna has no data */
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly coherence: number;
}

/**
 * Antenna phases by repeated projection: g_i is the phase of sum_j w V_ij g_j, averaged with the one before.
 * @see Thompson & D'Addario 1982, Radio Science 17, 357
 */
export function antennaPhasors({ graph, real, imag, weight }: BaselineValues): Phasors {
  const { antennas, first, second } = graph;
  const re = new Float64Array(antennas).fill(1);
  const im = new Float64Array(antennas);
  const sumRe = new Float64Array(antennas);
  const sumIm = new Float64Array(antennas);
  for (let round = 0; round < 40; round++) {
    sumRe.fill(0);
    sumIm.fill(0);
    for (let p = 0; p < first.length; p++) {
      const [i, j] = [first[p]!, second[p]!];
      const [vr, vi] = [weight[p]! * real[p]!, weight[p]! * imag[p]!];
      sumRe[i]! += vr * re[j]! - vi * im[j]!;
      sumIm[i]! += vr * im[j]! + vi * re[j]!;
      sumRe[j]! += vr * re[i]! + vi * im[i]!;
      sumIm[j]! += vr * im[i]! - vi * re[i]!;
    }
    let change = 0;
    for (let i = 0; i < antennas; i++) {
      const size = Math.hypot(sumRe[i]!, sumIm[i]!);
      if (size === 0) {
        re[i] = 0;
        im[i] = 0;
        continue;
      }
      const nextRe = re[i]! + sumRe[i]! / size;
      const nextIm = im[i]! + sumIm[i]! / size;
      const length = Math.hypot(nextRe, nextIm) || 1;
      change = Math.max(change, Math.hypot(nextRe / length - re[i]!, nextIm / length - im[i]!));
      re[i] = nextRe / length;
      im[i] = nextIm / length;
    }
    if (change < 1e-6) break;
  }
  return { re, im, coherence: coherenceOf(re, im, graph, real, imag, weight) };
}

function coherenceOf(
  re: Float64Array,
  im: Float64Array,
  { first, second }: Graph,
  real: Float64Array,
  imag: Float64Array,
  weight: Float64Array,
): number {
  let [sum, total] = [0, 0];
  for (let p = 0; p < first.length; p++) {
    const [i, j] = [first[p]!, second[p]!];
    // conj(g_i) g_j V_ij
    const gr = re[i]! * re[j]! + im[i]! * im[j]!;
    const gi = re[i]! * im[j]! - im[i]! * re[j]!;
    sum += weight[p]! * (gr * real[p]! - gi * imag[p]!);
    total += weight[p]! * Math.hypot(real[p]!, imag[p]!);
  }
  return total > 0 ? sum / total : 0;
}
