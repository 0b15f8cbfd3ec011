/**
 * A measure: computed numbers as a table that rules, reports and notebooks read by column name.
 */
import type { ColumnTable } from "arquero";
import type { Selection } from "../dataset/selection.ts";

/** What a row of a measure is about; rules name it in `each`. */
export type RowKind =
  | "dataset"
  | "antenna"
  | "baseline"
  | "channel"
  | "subband"
  | "polarization"
  | "field"
  | "scan"
  | "time"
  | "event"
  | "gap"
  | "weighting";

export interface Column {
  readonly name: string;
  /** "" for none; angles in rad or deg as it says, times MJD in "d" */
  readonly unit: string;
  readonly meaning: string;
}

/**
 * Columns of these names give a finding its scope and are understood everywhere:
 * antenna; antenna1, antenna2; subband; channel, or channel_lo and channel_hi; polarization (name, or several
 * joined by a space); time_start, time_end (MJD); field. A null means "all of it".
 */
export interface Measure {
  /** singular, as in a rule's `measure` */
  readonly name: string;
  readonly each: RowKind;
  readonly title: string;
  readonly columns: readonly Column[];
  /** true where a table without rows says that nothing is the matter, not that nothing is known */
  readonly mayBeEmpty?: boolean;
  readonly table: ColumnTable;
  /** by row, the samples it is about, where columns cannot name them all; absent: the columns say it */
  readonly scopes?: readonly Selection[];
}

/** By name. */
export type Measures = ReadonlyMap<string, Measure>;
