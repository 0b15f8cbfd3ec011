/** Tails of the normal distribution, and powers of noise turned into normal scores. */

const SQRT_TWO_PI = Math.sqrt(2 * Math.PI);

/** Natural logarithm of the probability that a unit normal deviate exceeds x. Relative error below 1e-12. */
export function logUpperTail(x: number): number {
  if (x < 2) return Math.log1p(-lowerTail(x));
  // Continued fraction of the Mills ratio, from its far end (Abramowitz & Stegun 1964, 26.2.14).
  let fraction = 0;
  for (let k = x < 4 ? 120 : 60; k >= 1; k--) fraction = k / (x + fraction);
  return -0.5 * x * x - Math.log((x + fraction) * SQRT_TWO_PI);
}

/** P(X < x) by the series of Abramowitz & Stegun 1964, 26.2.11; for x below 2, where no digits are lost. */
function lowerTail(x: number): number {
  if (x < -2) return Math.exp(logUpperTail(-x));
  let term = x;
  let sum = x;
  for (let k = 1; k < 60; k++) {
    term *= (x * x) / (2 * k + 1);
    sum += term;
  }
  return 0.5 + (sum * Math.exp(-0.5 * x * x)) / SQRT_TWO_PI;
}

/** The deviate that a unit normal variable exceeds with probability exp(-power), power > 0. */
export function scoreOfPower(power: number): number {
  if (power > 1e8) return Math.sqrt(2 * power);
  // Newton on the logarithm of the tail, whose slope is minus the inverse Mills ratio.
  let x = power > 1 ? Math.sqrt(2 * power) : -1;
  for (let round = 0; round < 60; round++) {
    const tail = logUpperTail(x);
    const slope = Math.exp(-0.5 * x * x - tail) / SQRT_TWO_PI;
    const step = (tail + power) / slope;
    // From far down the lower tail a full step would overshoot.
    x += Math.max(-1, Math.min(1, step));
    if (Math.abs(step) < 1e-13 * Math.max(1, Math.abs(x))) break;
  }
  return x;
}

/** Scores lie between these: what is fainter than LOWEST or brighter than HIGHEST says no more. */
export const LOWEST_SCORE = -3;
export const HIGHEST_SCORE = 8;

const STEPS_PER_UNIT = 32;
const HIGHEST_POWER = 40;

/** Score of the middle of each step of power. */
const SCORES = Float32Array.from({ length: HIGHEST_POWER * STEPS_PER_UNIT + 1 }, (_, step) => {
  const score = scoreOfPower((step + 0.5) / STEPS_PER_UNIT);
  return Math.min(HIGHEST_SCORE, Math.max(LOWEST_SCORE, score));
});

/**
 * Turn powers into normal scores in place: |V - background|^2 / (2 sigma^2) of pure noise is exponential with mean 1,
 * and its score is normal with mean 0 and variance 1, so that scores add up over anything (Stouffer et al. 1949).
 * Scores are of the nearest 1/32 of a unit of power and lie in LOWEST_SCORE..HIGHEST_SCORE; NaN becomes 0.
 */
export function fillScores(power: Float32Array, count: number): void {
  const top = SCORES.length - 1;
  for (let i = 0; i < count; i++) {
    const step = power[i]! * STEPS_PER_UNIT;
    power[i] = step < top ? SCORES[step | 0]! : step >= top ? HIGHEST_SCORE : 0;
  }
}
