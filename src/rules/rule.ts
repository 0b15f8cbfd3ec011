/** A rule, loaded: its texts parsed, nothing left to go wrong but the data. */
import type { RowKind } from "../measure/table.ts";
import type { Expression } from "./expression.ts";
import type { Family, Suggestion } from "./finding.ts";
import type { Template } from "./template.ts";

export interface Rule {
  readonly id: string;
  readonly family: Family;
  readonly title: string;
  /** what a reader wants to know, as a question */
  readonly question: string;
  /** Measure.name */
  readonly measure: string;
  /** rows it concerns; null: all */
  readonly where: Expression | null;
  /** one finding for each of these */
  readonly each: RowKind;
  readonly value: Expression;
  readonly unit: string;
  readonly limits: { readonly caution: Expression; readonly hold: Expression };
  /** 0..1: share of the score that its worst severity can take */
  readonly weight: number;
  readonly consequence: Template;
  readonly suggests: Suggestion;
  readonly sources: readonly string[];
  /** "ours", or the file it was loaded from as the user gave it */
  readonly from: string;
}

export interface RuleSet {
  /** by family in their order, then id */
  readonly rules: readonly Rule[];
  /** rules that a file switches off, and which file */
  readonly off: readonly { readonly id: string; readonly from: string }[];
}
