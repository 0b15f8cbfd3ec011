/** What may be behind a bad image, and what is said of each cause that is. */
import type { Selection } from "../../dataset/selection.ts";

export const CAUSE_KINDS = [
  "baseline",
  "interference",
  "antenna-gain",
  "antenna-phase",
  "bad-samples",
  "w-term",
  "bandwidth-smearing",
  "time-smearing",
  "missing-short-spacings",
  "outside-source",
] as const;
export type CauseKind = (typeof CAUSE_KINDS)[number];

export interface Cause {
  readonly kind: CauseKind;
  /** the samples concerned; null: all of them, or none in particular */
  readonly scope: Selection | null;
}
