/** Whether dropping samples is worth what it costs: it is when the predicted image comes out better without them. */

export interface Worth {
  /** 0..1 that the samples are at fault */
  readonly confidence: number;
  /** 0..1, of the findings that it would mend */
  readonly severity: number;
  /** rms that the fault adds to the image over the thermal noise of the image; null: not known */
  readonly excess: number | null;
  /** 1 - sqrt(kept weight / all weight) */
  readonly sensitivityLoss: number;
}

/** As likely sky as fault: a person should look, not drop. */
export const LEAST_CONFIDENCE = 0.5;
/**
 * Sensitivity that may go where the harm to the image has no number: for what is within all limits, just short of its
 * hold limit, and past it. Common practice, no source.
 */
const LOSS_ALLOWED = { harmless: 0.01, caution: 0.25, hold: 0.6 } as const;

/** Why it is not worth it, a clause; null when it is. */
export function whyNotWorth({ confidence, severity, excess, sensitivityLoss }: Worth): string | null {
  if (!(confidence >= LEAST_CONFIDENCE)) return "it may as well be sky as a fault";
  // With the fault the rms is sqrt(1 + excess^2) times the thermal noise; without its samples, 1/(1 - loss) times.
  const worth =
    excess === null
      ? !(sensitivityLoss > lossAllowed(severity))
      : Math.sqrt(1 + excess * excess) * (1 - sensitivityLoss) > 1 || sensitivityLoss === 0;
  if (worth) return null;
  return severity > 0
    ? "dropping it costs more sensitivity than the fault is worth"
    : "its harm is within all limits and dropping it costs more sensitivity";
}

function lossAllowed(severity: number): number {
  const { harmless, caution, hold } = LOSS_ALLOWED;
  return severity >= 1 ? hold : harmless + (caution - harmless) * Math.max(0, severity);
}
