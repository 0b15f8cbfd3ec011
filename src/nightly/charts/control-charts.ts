/**
 * Control charts of standard normal scores, two-sided, and the average number of nights between their false alarms, from
 * which their limits are set.
 * @see Page 1954, Biometrika 41, 100 (CUSUM); Roberts 1959, Technometrics 1, 239 (EWMA); Brook & Evans 1972, Biometrika 59,
 *   539 (run lengths by a Markov chain)
 */
import { logUpperTail } from "../../detect/statistics/normal.ts";

/** Allowance of the CUSUM: half of a shift of one standard deviation, which it finds soonest. */
export const CUSUM_ALLOWANCE = 0.5;
/** Weight of the newest night in the EWMA: Lucas & Saccucci 1990, Technometrics 32, 1. */
export const EWMA_WEIGHT = 0.1;

export interface ChartLimits {
  /** of the two one-sided sums */
  readonly cusum: number;
  /** of the average, in its standard deviations */
  readonly ewma: number;
}

export interface Chart {
  /** (scores) one-sided sums upwards and downwards, both >= 0 */
  readonly up: Float64Array;
  readonly down: Float64Array;
  /** (scores) the average over its standard deviation at that night */
  readonly average: Float64Array;
}

export function chartOf(scores: ArrayLike<number>): Chart {
  const up = new Float64Array(scores.length);
  const down = new Float64Array(scores.length);
  const average = new Float64Array(scores.length);
  let [high, low, mean] = [0, 0, 0];
  let left = 1;
  for (let i = 0; i < scores.length; i++) {
    high = Math.max(0, high + scores[i]! - CUSUM_ALLOWANCE);
    low = Math.max(0, low - scores[i]! - CUSUM_ALLOWANCE);
    mean += EWMA_WEIGHT * (scores[i]! - mean);
    left *= (1 - EWMA_WEIGHT) ** 2;
    up[i] = high;
    down[i] = low;
    average[i] = mean / Math.sqrt((EWMA_WEIGHT / (2 - EWMA_WEIGHT)) * (1 - left));
  }
  return { up, down, average };
}

/** First night past a limit and the way it went; null where none is. */
export function firstAlarm(chart: Chart, limits: ChartLimits): { at: number; rising: boolean } | null {
  for (let at = 0; at < chart.up.length; at++) {
    if (chart.up[at]! > limits.cusum || chart.average[at]! > limits.ewma) return { at, rising: true };
    if (chart.down[at]! > limits.cusum || chart.average[at]! < -limits.ewma) return { at, rising: false };
  }
  return null;
}

/** Limits at which each chart of a pair gives one false alarm in twice this many nights, so both together one. */
export function limitsFor(nights: number): ChartLimits {
  return {
    cusum: solve((limit) => cusumRunLength(limit), 2 * nights, 1, 30),
    ewma: solve((limit) => ewmaRunLength(limit), 2 * nights, 1, 9),
  };
}

/** States of the chain: limits are then good to three digits. */
const STATES = 81;

/** Mean number of nights to an alarm of a two-sided CUSUM when nothing changes. */
export function cusumRunLength(limit: number): number {
  // The two sides are never both above 0 for long: 1/ARL = 1/ARL+ + 1/ARL- (Kemp 1961).
  const width = (2 * limit) / (2 * STATES - 1);
  const one = runLength(STATES, 0, (from, to) => {
    const shift = CUSUM_ALLOWANCE + (to - from) * width;
    const upper = below(shift + width / 2);
    return to === 0 ? upper : upper - below(shift - width / 2);
  });
  return one / 2;
}

/** The same of an EWMA whose limit is at that many of its standard deviations in the long run. */
export function ewmaRunLength(limit: number): number {
  const edge = limit * Math.sqrt(EWMA_WEIGHT / (2 - EWMA_WEIGHT));
  const width = (2 * edge) / STATES;
  const middle = (state: number) => -edge + (state + 0.5) * width;
  return runLength(STATES, (STATES - 1) / 2, (from, to) => {
    const kept = (1 - EWMA_WEIGHT) * middle(from);
    return (
      below((middle(to) + width / 2 - kept) / EWMA_WEIGHT) -
      below((middle(to) - width / 2 - kept) / EWMA_WEIGHT)
    );
  });
}

/** Share of standard normal values below x. */
function below(x: number): number {
  const tail = Math.exp(logUpperTail(Math.abs(x)));
  return x > 0 ? 1 - tail : tail;
}

/** Expected steps of a chain from a state until it leaves: the solution of (1 - P) steps = 1. */
function runLength(states: number, start: number, chance: (from: number, to: number) => number): number {
  const rows = Array.from({ length: states }, (_, from) =>
    Float64Array.from({ length: states + 1 }, (_, to) =>
      to === states ? 1 : (from === to ? 1 : 0) - chance(from, to),
    ),
  );
  for (let pivot = 0; pivot < states; pivot++) {
    // Diagonally dominant: no rows need to change places.
    const row = rows[pivot]!;
    for (let other = 0; other < states; other++) {
      if (other === pivot) continue;
      const factor = rows[other]![pivot]! / row[pivot]!;
      if (factor === 0) continue;
      for (let column = pivot; column <= states; column++) rows[other]![column]! -= factor * row[column]!;
    }
  }
  return rows[start]![states]! / rows[start]![start]!;
}

/** Where a rising function comes to a value, by halving. */
function solve(rising: (x: number) => number, value: number, low: number, high: number): number {
  let [a, b] = [low, high];
  while (b - a > 1e-3) {
    const middle = (a + b) / 2;
    if (rising(middle) < value) a = middle;
    else b = middle;
  }
  return b;
}
