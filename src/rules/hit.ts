/** A row of a measure that is past a rule's caution limit. */
import type { Selection } from "../dataset/selection.ts";
import type { Measure, Measures } from "../measure/table.ts";
import type { Judgement } from "./finding.ts";
import type { Rule } from "./rule.ts";

export interface Hit {
  readonly rule: Rule;
  readonly measure: Measure;
  /** of `measure.table`, from 0 */
  readonly row: number;
  readonly value: number;
  readonly caution: number;
  readonly hold: number;
  /** above 0, at most 1 */
  readonly severity: number;
  readonly scope: Selection;
}

/** A hit and what fills its consequence: one value an expression of the template. */
export interface FilledHit {
  readonly hit: Hit;
  readonly values: readonly unknown[];
}

/** A judgement and the rows behind it. */
export interface Judged extends Judgement {
  /** what was judged, events with the dynamic range that each allows */
  readonly measures: Measures;
  /** by rule in the order of the set, then row */
  readonly hits: readonly Hit[];
  /** what rules could not judge: behind `notJudged` */
  readonly unjudged: readonly { readonly rule: string; readonly scope: Selection }[];
}
