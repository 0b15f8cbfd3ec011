/** One rule applied to its measure: the rows past its limits, and what could not be judged. */
import { EVERYTHING, type Selection } from "../dataset/selection.ts";
import type { Plan } from "../imaging/plan.ts";
import type { Measure, Measures } from "../measure/table.ts";
import { NotJudgeable, RuleColumns } from "./evaluate.ts";
import type { Hit } from "./hit.ts";
import type { Rule } from "./rule.ts";
import { measuredLabels, rowScopes, scopeWords } from "./scope.ts";
import { severityOf } from "./severity.ts";
import { templateExpressions } from "./template.ts";

export interface Applied {
  readonly hits: readonly Hit[];
  /** by hit: what fills the consequence's expressions */
  readonly fillings: readonly (readonly unknown[])[];
  /** rows that the rule looked at and could judge */
  readonly judged: number;
  /** why some or all rows could not be judged; null when all could */
  readonly notJudged: string | null;
  /** scopes of those rows; everything when there are no rows to tell apart */
  readonly unjudged: readonly Selection[];
}

/** What happened: where nothing did, there are no rows, and that is an answer. */
const MAY_BE_EMPTY = new Set(["event", "gap"]);

/** How many of the rows that could not be judged are named. */
const MOST_NAMED = 3;

export function applyRule(rule: Rule, measures: Measures, plan: Plan): Applied {
  const measure = measures.get(rule.measure);
  if (measure === undefined) return nothing(`there is no measure "${rule.measure}" of this dataset`);
  if (measure.table.numRows() === 0 && measure.mayBeEmpty !== true && !MAY_BE_EMPTY.has(measure.each)) {
    return nothing(`the measure "${rule.measure}" has no rows`);
  }
  try {
    return applyTo(rule, measure, measures, plan);
  } catch (error) {
    if (!(error instanceof NotJudgeable)) throw error;
    return nothing(error.message);
  }
}

function nothing(why: string): Applied {
  return { hits: [], fillings: [], judged: 0, notJudged: why, unjudged: [EVERYTHING] };
}

function applyTo(rule: Rule, measure: Measure, measures: Measures, plan: Plan): Applied {
  const { caution, hold } = rule.limits;
  const shown = templateExpressions(rule.consequence);
  const read = [rule.value, caution, hold, ...shown, ...(rule.where === null ? [] : [rule.where])];
  const columns = new RuleColumns(measure, read, plan, measures);
  const values = columns.numbers(rule.value);
  const cautions = columns.numbers(caution);
  const holds = columns.numbers(hold);
  const wanted = rule.where === null ? null : columns.condition(rule.where);
  const scopeOf = rowScopes(measure);
  const label = measuredLabels(measures);
  const hits: Hit[] = [];
  const unjudged: number[] = [];
  let judged = 0;
  for (let row = 0; row < columns.rows; row++) {
    if (wanted?.[row] === false) continue;
    const severity = severityOf(values[row]!, cautions[row]!, holds[row]!);
    if (wanted?.[row] === null || Number.isNaN(severity)) {
      unjudged.push(row);
      continue;
    }
    judged += 1;
    if (severity === 0) continue;
    hits.push({
      rule,
      measure,
      row,
      value: values[row]!,
      caution: cautions[row]!,
      hold: holds[row]!,
      severity,
      scope: scopeOf(row),
    });
  }
  const filled = shown.map((expression) => columns.evaluate(expression, values));
  return {
    hits,
    fillings: hits.map((hit) => filled.map((column) => column[hit.row])),
    judged,
    notJudged:
      unjudged.length === 0
        ? null
        : whyNot(unjudged, columns.rows, (row) => scopeWords(scopeOf(row), label), values, cautions, holds),
    unjudged: unjudged.map(scopeOf),
  };
}

function whyNot(
  rows: readonly number[],
  of: number,
  words: (row: number) => string,
  values: readonly number[],
  cautions: readonly number[],
  holds: readonly number[],
): string {
  const first = rows[0]!;
  const limitless = !(Number.isFinite(cautions[first]) && Number.isFinite(holds[first]));
  const lacks =
    Number.isNaN(values[first]) || !limitless
      ? cautions[first] === holds[first] && !Number.isNaN(values[first])
        ? "caution and hold come out the same"
        : "its value is not known"
      : "its limits are not known";
  if (of === 1) return lacks;
  const named = rows.slice(0, MOST_NAMED).map(words);
  const more = rows.length > MOST_NAMED ? ` and ${rows.length - MOST_NAMED} more` : "";
  return `${lacks} for ${rows.length} of ${of} rows: ${named.join("; ")}${more}`;
}
