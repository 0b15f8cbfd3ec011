/** Antennas whose phase is new in every integration, beyond what the others' wander does. */
import { median, robustSigma } from "../../util/statistics.ts";
import type { DetectedEvent } from "../event.ts";
import type { Grid } from "./grid.ts";
import { degrees, makeEvent } from "./make-event.ts";
import { phaseStep, stepsOf } from "./step-search.ts";

/** Of the others' rms. */
const OUT_OF_FAMILY = 2.5;
const LEAST_DEGREES = 4;
const FEWEST_STEPS = 12;
/** Power over noise variance of one integration: the phase of noise alone is noise too. */
const LEAST_SIGNAL = 25;
/** Relative error of a robust sigma times sqrt(n), for differences of neighbours. */
const ROBUST_ERROR = 1.7;

/** @returns the events, and the antennas (indices) they name */
export function phaseNoise(grid: Grid): { events: DetectedEvent[]; antennas: Set<number> } {
  const antennas = new Set<number>();
  const events: DetectedEvent[] = [];
  if (grid.antennas.length < 4) return { events, antennas };
  const fine = scatters(grid, 1);
  const coarse = scatters(grid, 4);
  const typical = median(fine.map(({ rms }) => rms));
  for (const [a, { rms, count, error }] of fine.entries()) {
    if (!(rms > OUT_OF_FAMILY * typical) || count < FEWEST_STEPS || !(error < rms / 2)) continue;
    // Of white noise, means of four halve the rms; wander grows with the window.
    if (!(coarse[a]!.rms < 0.8 * rms)) continue;
    const size = Math.sqrt(rms * rms - typical * typical) / Math.SQRT2;
    if (degrees(size) < LEAST_DEGREES) continue;
    const significance = (Math.log(rms / typical) * Math.sqrt(count)) / ROBUST_ERROR;
    if (significance < 6 || !(signalOf(grid, a) > LEAST_SIGNAL)) continue;
    antennas.add(a);
    const number = grid.antennas[a]!;
    const loss = 1 - Math.exp(-(size * size) / 2);
    events.push(
      makeEvent(grid, {
        kind: "phase-noise",
        cause: "antenna",
        scope: { antennas: [number] },
        size: degrees(size),
        sizeError: degrees(size) * (ROBUST_ERROR / Math.sqrt(count)),
        unit: "deg",
        significance,
        evidence:
          `The phase of antenna ${number} scatters by ${degrees(size).toFixed(1)} deg rms from one integration to the next, ` +
          `${(rms / typical).toFixed(1)} times as much as the array's typical antenna; means over time lose ${(100 * loss).toFixed(0)} % of its amplitude.`,
        repair: null,
      }),
    );
  }
  return { events, antennas };
}

function scatters(grid: Grid, window: number) {
  const { phase, error } = stepsOf(grid, grid.planes, window, phaseStep);
  const antennas = grid.antennas.length;
  return grid.antennas.map((_, a) => {
    const values: number[] = [];
    const errors: number[] = [];
    for (let i = a; i < phase.length; i += antennas) {
      if (Number.isNaN(phase[i]!)) continue;
      values.push(phase[i]!);
      errors.push(error[i]!);
    }
    return { rms: robustSigma(values), count: values.length, error: median(errors) };
  });
}

/** Median over an antenna's baselines of their median power over noise variance. */
function signalOf(grid: Grid, antenna: number): number {
  return median(
    grid.touching[antenna]!.map((b) => {
      const ratios: number[] = [];
      for (const { real, imag, variance } of grid.planes) {
        for (let i = b; i < real.length; i += grid.baselines) {
          if (Number.isNaN(real[i]!)) continue;
          ratios.push((real[i]! ** 2 + imag[i]! ** 2) / variance[i]! - 2);
        }
      }
      return median(ratios);
    }),
  );
}
