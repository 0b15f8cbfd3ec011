/** Whether dropping samples is worth what it costs. */

export interface Worth {
  /** 0..1 that the samples are at fault */
  readonly confidence: number;
  /** 0..1, of the findings that it would mend */
  readonly severity: number;
  /** 1 - sqrt(kept weight / all weight) */
  readonly sensitivityLoss: number;
}

/** As likely sky as fault: a person should look, not drop. */
export const LEAST_CONFIDENCE = 0.5;
/** Sensitivity that may go for samples whose harm is within all limits. Common practice, no source. */
const HARMLESS_LOSS = 0.01;
/** Sensitivity that may go for a finding just short of its hold limit; a hold is worth anything but most of the data. */
const CAUTION_LOSS = 0.25;
const HOLD_LOSS = 0.6;

/**
 * Why it is not worth it, a clause; null when it is. What harms the image more may cost more.
 */
export function whyNotWorth({ confidence, severity, sensitivityLoss }: Worth): string | null {
  if (!(confidence >= LEAST_CONFIDENCE)) return "it may as well be sky as a fault";
  const allowed =
    severity >= 1 ? HOLD_LOSS : HARMLESS_LOSS + (CAUTION_LOSS - HARMLESS_LOSS) * Math.max(0, severity);
  // Unknown loss: nothing has a weight, so nothing is lost.
  if (!(sensitivityLoss > allowed)) return null;
  return severity > 0
    ? "dropping it costs more sensitivity than the fault is worth"
    : "its harm is within all limits and dropping it costs sensitivity";
}
