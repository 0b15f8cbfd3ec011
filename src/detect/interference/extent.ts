/** How many samples a feature takes where not all of them were looked at. */
import type { Feature } from "./features.ts";
import type { Grid } from "./grid.ts";

/**
 * Usable samples of a feature's rectangles: those counted where everything was looked at; else by the survey's tracks, which
 * know how many samples of a cell are usable but not in which channels, so that each channel is given its share.
 */
export function usableOf(grid: Grid, { rectangles, who, counts }: Feature): number {
  if (grid.pass.choice.isWhole || grid.pass.marks === null) return counts.usable;
  const { tracks, dataset } = grid.survey;
  const { subbands, channels, polarizations } = dataset.shape;
  const { baselines, polarizations: products } = who.subset;
  let samples = 0;
  for (const { firstStep, lastStep, low, high } of rectangles) {
    for (let k = grid.firstOfStep[firstStep]!; k < grid.firstOfStep[lastStep + 1]!; k++) {
      const cell = grid.cells[k]!;
      if (baselines !== null && baselines[tracks.baseline[cell]!] !== 1) continue;
      for (let s = Math.floor(low / channels); s <= Math.floor(high / channels); s++) {
        const columns = Math.min(high, (s + 1) * channels - 1) - Math.max(low, s * channels) + 1;
        for (let p = 0; p < polarizations; p++) {
          if (products !== null && products[p] !== 1) continue;
          samples += (tracks.usable[(cell * subbands + s) * polarizations + p]! * columns) / channels;
        }
      }
    }
  }
  return Math.max(counts.usable, Math.round(samples));
}
