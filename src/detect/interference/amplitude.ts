/** How strong a feature is, from how many of its samples noise and it together lift over the mark. */
import { ELEVATED_SHARE } from "../pass/marks.ts";
import type { Feature } from "./features.ts";

/** Power over 2 sigma^2 that a share ELEVATED_SHARE of noise exceeds. */
const ELEVATED_POWER = -Math.log(ELEVATED_SHARE);
/** From here on the share of elevated samples says no more. */
const MOST = 8;

/** Amplitude in sigmas of one component, 0 to 8; NaN where no marks were kept. */
export function amplitudeOf({ counts, amplitude }: Feature): number {
  if (amplitude !== undefined) return Math.min(MOST, amplitude);
  if (counts.usable === 0) return Number.NaN;
  const [share, power] =
    counts.bright > 0.2 * counts.usable
      ? [counts.bright / counts.usable, BRIGHT_POWER]
      : [counts.elevated / counts.usable, ELEVATED_POWER];
  let low = 0;
  let high = 2 * MOST;
  for (let round = 0; round < 50; round++) {
    const middle = (low + high) / 2;
    if (exceeding(middle, power) < share) low = middle;
    else high = middle;
  }
  return Math.min(MOST, low);
}

/** Power over 2 sigma^2 of a score of 6: -ln of the normal tail beyond it, 9.866e-10. */
const BRIGHT_POWER = 20.7367;

/**
 * Probability that |a + noise|^2 / (2 sigma^2) exceeds `power` for an amplitude of a sigmas: the Rice distribution's
 * tail, Marcum's Q of order 1, as a Poisson mixture of gamma tails.
 */
export function exceeding(amplitude: number, power: number): number {
  const mean = (amplitude * amplitude) / 2;
  let weight = Math.exp(-mean);
  let term = Math.exp(-power);
  let tail = term;
  let sum = weight * tail;
  for (let k = 1; k < 400; k++) {
    weight *= mean / k;
    term *= power / k;
    tail += term;
    sum += weight * tail;
  }
  return Math.min(1, sum);
}
