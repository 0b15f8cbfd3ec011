/** How long the baselines are. */
import type { Survey } from "../../measure/survey-result.ts";
import { median } from "../../util/statistics.ts";

/** (baselines) median projected length, seconds of light travel; NaN where u, v are. */
export function projectedLengths({ baselines, tracks }: Survey): Float64Array {
  return Float64Array.from(baselines, (_, b) => {
    const [first, last] = [tracks.firstCell[b]!, tracks.firstCell[b + 1]!];
    // A few cells spread over the track tell its middle.
    const step = Math.max(1, Math.floor((last - first) / 33));
    const lengths: number[] = [];
    for (let cell = first; cell < last; cell += step)
      lengths.push(Math.hypot(tracks.u[cell]!, tracks.v[cell]!));
    return median(lengths);
  });
}

/** Baselines from the shortest to the longest; those of unknown length last. */
export function lengthOrder(survey: Survey): number[] {
  const lengths = projectedLengths(survey);
  const key = (b: number) => (Number.isNaN(lengths[b]!) ? Number.POSITIVE_INFINITY : lengths[b]!);
  return survey.baselines.map((_, b) => b).sort((a, b) => key(a) - key(b) || a - b);
}
