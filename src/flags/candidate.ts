/** Samples that might be worth dropping, and why. */
import type { Selection } from "../dataset/selection.ts";

export interface Candidate {
  readonly selection: Selection;
  /** id of the rule that suggests it */
  readonly rule: string;
  /** 0..1 that the samples are at fault */
  readonly confidence: number;
  /** 0..1, of the findings it would mend; 0 where they are within their limits */
  readonly severity: number;
  /** rms that the fault adds to the image over the thermal noise of the image; null: not known */
  readonly excess: number | null;
  /** sentences, the weightiest first */
  readonly reasons: readonly string[];
  /** a cure other than flagging, a clause, or null */
  readonly repair: string | null;
}
