/** What is left of baseline phases and gains after those of the antennas, which closure phases and amplitudes show. */
import { median } from "../../util/statistics.ts";
import { antennaGains } from "./antenna-gains.ts";
import { antennaPhases, LEAST_VARIANCE, wrap } from "./antenna-phases.ts";
import type { Grid, Plane } from "./grid.ts";

/** By baseline and stretch of time, stretch fastest; NaN unknown. */
export interface Residuals {
  /** [start, end) integrations of each stretch */
  readonly stretches: readonly (readonly [number, number])[];
  /** radians */
  readonly phase: Float64Array;
  /** natural logarithms */
  readonly gain: Float64Array;
  /** 1 sigma of either by noise */
  readonly error: Float64Array;
}

/**
 * Medians over the products.
 *
 * @param apart baselines that the antennas' solution does without, so that it takes no share of their error
 */
export function residualsOf(
  grid: Grid,
  stretches: Residuals["stretches"],
  apart: ReadonlySet<number> = new Set(),
): Residuals {
  const { baselines } = grid;
  const size = baselines * stretches.length;
  const phases: number[][] = Array.from({ length: size }, () => []);
  const gains: number[][] = phases.map(() => []);
  const errors: number[][] = phases.map(() => []);
  for (const [s, [from, to]] of stretches.entries()) {
    for (const plane of grid.planes) {
      const mean = meansOf(grid, plane, from, to);
      const { first, second, weight } = mean;
      const used = { ...mean, weight: weight.map((w, b) => (apart.has(b) ? 0 : w)) };
      const solved = antennaPhases(used, grid.antennas.length, true).phase;
      const gain = antennaGains(used, grid.antennas.length, true).phase;
      const left = mean.value.map((x, b) =>
        weight[b]! > 0 ? x - gain[first[b]!]! - gain[second[b]!]! : Number.NaN,
      );
      const common = median(left.filter((_, b) => !apart.has(b)));
      for (let b = 0; b < baselines; b++) {
        if (!(weight[b]! > 0)) continue;
        const at = b * stretches.length + s;
        const turned = solved[first[b]!]! - solved[second[b]!]!;
        phases[at]!.push(wrap(Math.atan2(mean.imag[b]!, mean.real[b]!) - turned));
        gains[at]!.push(left[b]! - common);
        errors[at]!.push(1 / Math.sqrt(weight[b]!));
      }
    }
  }
  return {
    stretches,
    phase: Float64Array.from(phases, median),
    gain: Float64Array.from(gains, median),
    error: Float64Array.from(errors, (own) => median(own) / Math.sqrt(Math.max(1, own.length))),
  };
}

/** Below this many sigmas an amplitude's logarithm is no normal variable. */
const LEAST_SIGMAS = 4;

function meansOf(grid: Grid, plane: Plane, from: number, to: number) {
  const { baselines, first, second } = grid;
  const column = () => new Float64Array(baselines);
  const [real, imag, weight, value] = [column(), column(), column(), column()];
  for (let b = 0; b < baselines; b++) {
    let [variance, n, amplitude] = [0, 0, 0];
    for (let t = from; t < to; t++) {
      const i = t * baselines + b;
      if (Number.isNaN(plane.real[i]!)) continue;
      real[b]! += plane.real[i]!;
      imag[b]! += plane.imag[i]!;
      variance += plane.variance[i]!;
      amplitude += plane.real[i]! ** 2 + plane.imag[i]! ** 2 - 2 * plane.variance[i]!;
      n += 1;
    }
    if (n === 0) continue;
    const power = real[b]! ** 2 + imag[b]! ** 2 - 2 * variance;
    if (!(power > LEAST_SIGMAS ** 2 * variance) || !(amplitude > 0)) continue;
    weight[b] = 1 / Math.max(LEAST_VARIANCE, variance / power);
    value[b] = Math.log(amplitude / n) / 2;
  }
  return { first, second, real, imag, weight, value };
}
