/** A feature by its sums over baselines alone, where the dataset is too large to keep a mark of each sample. */
import type { Band } from "../pass/bands.ts";
import { LENGTH_GROUPS } from "../pass/combined.ts";
import { logUpperTail } from "../statistics/normal.ts";
import type { Grid, Rectangle } from "./grid.ts";

export interface Sums {
  readonly samples: number;
  readonly significance: number;
  /** sigmas of one component a sample */
  readonly amplitude: number;
}

export function sumsOf(grid: Grid, band: Band, rectangles: readonly Rectangle[]): Sums {
  const { combined } = grid.pass;
  const size = grid.steps * band.columns;
  const scores = new Float32Array(size);
  const marks = new Uint8Array(size);
  const counts = new Float32Array(size);
  combined.fill(LENGTH_GROUPS, band.first, band.columns, null, scores, marks, counts);
  let sum = 0;
  let samples = 0;
  for (const { firstStep, lastStep, low, high } of rectangles) {
    for (let step = firstStep; step <= lastStep; step++) {
      for (let column = low; column <= high; column++) {
        const i = step * band.columns + column - band.first;
        sum += scores[i]! * Math.sqrt(counts[i]!);
        samples += counts[i]!;
      }
    }
  }
  if (samples === 0) return { samples, significance: 0, amplitude: 0 };
  // The mean score as a power over 2 sigma^2, less the 1 that is noise.
  const power = -logUpperTail(sum / samples);
  return {
    samples,
    significance: Math.max(0, sum / Math.sqrt(samples)),
    amplitude: Math.sqrt(2 * Math.max(0, power - 1)),
  };
}
