/** The w of every track cell: the file's, or, where the file has none, the one that the antenna positions give. */
import type { Sampling } from "./sampling.ts";

export interface TrackW {
  /** (cells of the tracks) seconds; NaN unknown */
  readonly w: Float64Array;
  /** the file's w is zero throughout */
  readonly zeroed: boolean;
}

/** |w| below this share of the spacing is no w: float32 leaves more. */
const NO_W = 1e-9;

/**
 * @param expected (cells) w from the antenna positions, seconds, or null when they do not give it
 */
export function trackW(sampling: Sampling, expected: Float64Array | null = null): TrackW {
  const { tracks } = sampling.survey;
  let largest = 0;
  let spacing = 0;
  for (let cell = 0; cell < tracks.cells; cell++) {
    if (tracks.w[cell]! > largest || -tracks.w[cell]! > largest) largest = Math.abs(tracks.w[cell]!);
    const length = Math.hypot(tracks.u[cell]!, tracks.v[cell]!);
    if (length > spacing) spacing = length;
  }
  if (largest > spacing * NO_W) return { w: tracks.w, zeroed: false };
  const w = expected ?? new Float64Array(tracks.cells).fill(Number.NaN);
  return { w, zeroed: spacing > 0 };
}
