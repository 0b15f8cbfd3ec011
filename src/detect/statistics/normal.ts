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

/** What is brighter than this says no more. */
export const HIGHEST_SCORE = 8;

const STEPS_PER_UNIT = 128;
const HIGHEST_POWER = 40;

/** Mean score of noise over each step of power, so that the scores of noise have the mean 0. */
const SCORES = stepScores();

function stepScores(): Float32Array {
  const scores = new Float32Array(HIGHEST_POWER * STEPS_PER_UNIT + 1);
  let below = Number.NEGATIVE_INFINITY;
  for (let step = 0; step < scores.length; step++) {
    const power = (step + 1) / STEPS_PER_UNIT;
    const above = scoreOfPower(power);
    const share = Math.exp(-step / STEPS_PER_UNIT) - Math.exp(-power);
    const mean = (Math.exp(-0.5 * below * below) - Math.exp(-0.5 * above * above)) / (SQRT_TWO_PI * share);
    // Far up the tail the difference loses its digits: there the middle will do.
    const score = power > 20 ? 0.5 * (below + above) : mean;
    scores[step] = Math.min(HIGHEST_SCORE, score);
    below = above;
  }
  return scores;
}

/**
 * Turn powers into normal scores in place: |V - background|^2 / (2 sigma^2) of pure noise is exponential with mean 1,
 * and its score is normal with mean 0 and variance 1, so that scores add up over anything (Stouffer et al. 1949).
 * Scores are of steps of 1/128 of a unit of power and at most HIGHEST_SCORE; NaN becomes 0.
 */
export function fillScores(power: Float32Array, count: number): void {
  const top = SCORES.length - 1;
  for (let i = 0; i < count; i++) {
    const step = power[i]! * STEPS_PER_UNIT;
    power[i] = step < top ? SCORES[step | 0]! : step >= top ? HIGHEST_SCORE : 0;
  }
}
