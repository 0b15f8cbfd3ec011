/**
 * The scale of exponential powers from the mean of the powers capped: one pass, nothing sorted, and what lies beyond the
 * cap counts as the cap, so that a minority of outliers moves it no more than it moves a quantile.
 */

const STEPS = 2048;
/** Of the cap: nearer to it than this, the scale cannot be told. */
const SATURATED = 0.985;

export class CappedMean {
  readonly cap: number;
  /** relative standard error of the scale, times the square root of the number of powers */
  readonly error: number;
  /** scale at each step of the mean */
  private readonly table: Float64Array;

  constructor(cap: number) {
    this.cap = cap;
    const tail = Math.exp(-cap);
    const mean = 1 - tail;
    const square = 2 * (1 - tail * (1 + cap));
    this.error = Math.sqrt(square - mean * mean) / (1 - tail * (1 + cap));
    this.table = Float64Array.from({ length: STEPS + 1 }, (_, i) =>
      solve((SATURATED * cap * i) / STEPS, cap),
    );
  }

  /** Scale f with f (1 - exp(-cap/f)) = mean; infinite where nearly all powers are at the cap, NaN where the mean is. */
  factor(mean: number): number {
    const place = (mean / (SATURATED * this.cap)) * STEPS;
    if (!(place < STEPS)) return place >= STEPS ? Number.POSITIVE_INFINITY : Number.NaN;
    const step = Math.floor(place);
    const below = this.table[step]!;
    return below + (place - step) * (this.table[step + 1]! - below);
  }
}

/** By Newton's method. */
function solve(mean: number, cap: number): number {
  if (mean <= 0) return 0;
  let f = Math.max(mean, 0.2 * cap);
  for (let round = 0; round < 60; round++) {
    const tail = Math.exp(-cap / f);
    const step = (f * (1 - tail) - mean) / (1 - tail * (1 + cap / f));
    f = Math.max(f - step, 0.1 * f);
    if (Math.abs(step) < 1e-12 * f) break;
  }
  return f;
}
