/** What a history keeps of each check. */
import type { Family, Verdict } from "../../rules/finding.ts";

export interface FindingRecord {
  readonly rule: string;
  readonly family: Family;
  readonly verdict: Verdict;
  readonly severity: number;
  readonly title: string;
  /** in words */
  readonly place: string;
  /** names */
  readonly antennas: readonly string[];
  readonly consequence: string;
}

export const SERIES_KINDS = ["antenna", "baseline group", "channel", "rule"] as const;
export type SeriesKind = (typeof SERIES_KINDS)[number];

/** One number of a night that trends are sought in. */
export interface MeasuredRecord {
  readonly kind: SeriesKind;
  /** the antenna's name, the group of baselines, the stretch of frequency, the rule */
  readonly item: string;
  /** key into MEASURES */
  readonly measure: string;
  readonly value: number;
}

export interface InterferenceRecord {
  /** Hz */
  readonly low: number;
  readonly high: number;
  /** MJD (UTC) */
  readonly start: number;
  readonly end: number;
}

/** What a check and a failed one have in common. */
interface Identity {
  /** SHA-256 of the files */
  readonly content: string;
  /** SHA-256 of the plan and the rules */
  readonly judgedBy: string;
  /** hostile text */
  readonly name: string;
  readonly path: string;
  readonly bytes: number;
  /** YYYY-MM-DD */
  readonly night: string;
  /** path of the plan file; null where none matches */
  readonly plan: string | null;
  readonly tool: string;
  /** UTC */
  readonly checked: string;
}

export interface JudgedRecord extends Identity {
  readonly error: null;
  readonly verdict: Verdict;
  readonly score: number;
  readonly scoreAfter: number;
  /** MJD (UTC) */
  readonly start: number;
  readonly end: number;
  /** hostile text */
  readonly field: string;
  readonly band: string;
  /** Hz */
  readonly low: number;
  readonly high: number;
  /** null where there is no finding */
  readonly cause: string | null;
  /** relative to the folder of the index page */
  readonly report: string;
  readonly findings: readonly FindingRecord[];
  readonly measured: readonly MeasuredRecord[];
  readonly interference: readonly InterferenceRecord[];
}

/** A dataset that could not be judged. */
export interface FailedRecord extends Identity {
  readonly error: string;
}

export type CheckRecord = JudgedRecord | FailedRecord;

/** A check as it is read back for the index page: without its measures. */
export type CheckRow = { readonly id: number } & (
  | Omit<JudgedRecord, "measured" | "interference">
  | FailedRecord
);
