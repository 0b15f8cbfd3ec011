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

/** A cause as the reports say it. */
export interface TriageCause {
  /** a cause kind, or the rule of a finding where there is no image */
  readonly kind: string;
  readonly title: string;
  /** the samples in words; empty where no samples are at fault */
  readonly where: string;
  readonly scope: Selection | null;
  /** of what is wrong with the image beyond its noise, 0..1; NaN where there is no image */
  readonly share: number;
  /** how far the findings that it rests on go, 0..1; NaN without any */
  readonly severity: number;
  /** sentences */
  readonly evidence: readonly string[];
  /** rules whose findings in the data agree with it */
  readonly rules: readonly string[];
  /** sentences */
  readonly test: string;
  readonly cure: string;
  /** ids of flags proposed against it */
  readonly flags: readonly string[];
}
