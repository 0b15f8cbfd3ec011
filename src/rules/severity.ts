/** Severity, verdict and score. */
import type { Verdict } from "./finding.ts";

/**
 * How far a value goes from its caution limit (0) to its hold limit (1), whichever of them is the larger.
 *
 * @returns 0..1; NaN when a number is NaN or the limits are the same
 */
export function severityOf(value: number, caution: number, hold: number): number {
  if (Number.isNaN(value) || !(Number.isFinite(caution) && Number.isFinite(hold)) || caution === hold) {
    return Number.NaN;
  }
  // Compared first: (value - caution) / (hold - caution) can round to just under 1 at the limit itself.
  if (caution < hold ? value >= hold : value <= hold) return 1;
  if (caution < hold ? value <= caution : value >= caution) return 0;
  return (value - caution) / (hold - caution);
}

/** `ready` at 0, `hold` at 1, `caution` between. */
export function verdictOf(severity: number): Verdict {
  return severity >= 1 ? "hold" : severity > 0 ? "caution" : "ready";
}

/** Score below which a dataset holds, whatever the single findings say. */
export const HOLD_SCORE = 50;

/** 100 times the product of 1 - weight x worst severity, one factor a rule; 0..100, not rounded. */
export function scoreOf(rules: Iterable<{ readonly weight: number; readonly severity: number }>): number {
  let kept = 1;
  for (const { weight, severity } of rules) kept *= 1 - weight * severity;
  return 100 * kept;
}

/** A dataset's verdict from those of its findings and its score with the suggested flags applied. */
export function datasetVerdict(verdicts: readonly Verdict[], scoreAfterFlags: number): Verdict {
  if (verdicts.includes("hold") || scoreAfterFlags < HOLD_SCORE) return "hold";
  return verdicts.includes("caution") ? "caution" : "ready";
}
