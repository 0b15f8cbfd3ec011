/** What a rule says about this dataset; written to report.json as it stands. */
import type { Selection } from "../dataset/selection.ts";

export type Verdict = "ready" | "caution" | "hold";

export const FAMILIES = [
  "flagged-fraction",
  "amplitude",
  "bandpass",
  "phase",
  "coverage",
  "w-term",
  "smearing",
  "geometry",
  "weights",
  "polarization",
  "metadata",
] as const;
export type Family = (typeof FAMILIES)[number];

/** What a rule may suggest; anything but `flag` is advice that flagging does not give. */
export const SUGGESTIONS = [
  "flag",
  "calibrate",
  "correct-w",
  "narrow-field",
  "more-data",
  "average-less",
  "fix-metadata",
  "reweight",
  "none",
] as const;
export type Suggestion = (typeof SUGGESTIONS)[number];

export interface Finding {
  readonly rule: string;
  readonly family: Family;
  readonly verdict: Verdict;
  /** 0..1 */
  readonly severity: number;
  readonly title: string;
  /** only the parts that narrow it are present */
  readonly scope: Partial<{ [Part in keyof Selection]: NonNullable<Selection[Part]> }>;
  readonly measured: { readonly value: number; readonly unit: string };
  readonly limits: {
    readonly caution: number;
    readonly hold: number;
    readonly unit: string;
    readonly from: string;
  };
  readonly mendedByFlags: boolean;
  readonly consequence: { readonly text: string; readonly value?: number; readonly unit?: string };
  /** sentences */
  readonly evidence: readonly string[];
  readonly suggests: Suggestion;
  /** ids of suggested flags */
  readonly flags: readonly string[];
}

/** The judgement of a set of measures. Scores are 0..100, not rounded. */
export interface Judgement {
  readonly score: number;
  readonly verdict: Verdict;
  /** worst first */
  readonly findings: readonly Finding[];
  /** what each rule that took points took: 100 times its weight times its worst severity, largest first */
  readonly taken: readonly { readonly rule: string; readonly points: number }[];
  /** rules that could not be judged on this dataset and why */
  readonly notJudged: readonly { readonly rule: string; readonly why: string }[];
}
