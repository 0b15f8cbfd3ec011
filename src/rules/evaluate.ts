/** Expressions of a rule over the rows of its measure, compiled by arquero. */
import { type ColumnTable, table } from "arquero";
import type { Plan } from "../imaging/plan.ts";
import type { Measure, Measures } from "../measure/table.ts";
import { nearest } from "../util/errors.ts";
import { arqueroText, type Expression, type Source } from "./expression.ts";
import { isPlanKey, planValue } from "./plan-values.ts";

/** Why a rule cannot be judged on these measures, one clause. */
export class NotJudgeable extends Error {}

/** No column of a measure begins with a space. */
const VALUE_COLUMN = " value";
const RESULT_COLUMN = " result";

/** The columns that a rule reads, one row a row of the measure, and what plan and dataset say. */
export class RuleColumns {
  readonly rows: number;
  private readonly measure: Measure;
  private readonly table: ColumnTable;

  /**
   * @throws NotJudgeable when a column that the expressions name is not there
   */
  constructor(measure: Measure, expressions: readonly Expression[], plan: Plan, measures: Measures) {
    this.measure = measure;
    this.rows = measure.table.numRows();
    const columns: Record<string, unknown[]> = {};
    const parameters: Record<string, unknown> = {};
    for (const { source, name } of expressions.flatMap((expression) => expression.names)) {
      if (source === "d") columns[name] = cleaned(columnOf(measure, name));
      else if (source === "plan" && isPlanKey(name))
        parameters[parameter(source, name)] = planValue(plan, name);
      else if (source === "dataset") parameters[parameter(source, name)] = datasetValue(measures, name);
    }
    // A table without a column has no rows; this one has as many as the measure.
    columns[VALUE_COLUMN] = new Array(this.rows).fill(Number.NaN);
    this.table = table(columns).params(parameters) as ColumnTable;
  }

  /** One value a row; `value` holds what the rule computed. */
  evaluate(expression: Expression, value: readonly number[]): unknown[] {
    return this.run(expression, this.table.assign(table({ [VALUE_COLUMN]: [...value] })));
  }

  private run(expression: Expression, input: ColumnTable): unknown[] {
    if (this.rows === 0) return [];
    const text = arqueroText(expression.root, reference);
    return Array.from(input.derive({ [RESULT_COLUMN]: text }).array(RESULT_COLUMN) as Iterable<unknown>);
  }

  /** One number a row: true is 1, false 0, and everything else that is no number NaN. */
  numbers(expression: Expression, input: ColumnTable = this.table): number[] {
    return this.run(expression, input).map((value) =>
      typeof value === "number" ? value : typeof value === "boolean" ? Number(value) : Number.NaN,
    );
  }

  /**
   * Rows whose condition would depend on a number that is unknown (NaN; a null says there is none): it comes out
   * different when the unknown ones are taken for very large or very small.
   */
  unknownRows(condition: Expression): boolean[] {
    const names = condition.names.flatMap(({ source, name }) => (source === "d" ? [name] : []));
    const columns = names.map((name) => columnOf(this.measure, name));
    const unknown = Array.from({ length: this.rows }, (_, row) =>
      columns.some((column) => Number.isNaN(column[row])),
    );
    if (!unknown.includes(true)) return unknown;
    const [large, small] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY].map((extreme) => {
      const replaced = columns.map((column) =>
        column.map((value) => (Number.isNaN(value) ? extreme : value)),
      );
      const filled = Object.fromEntries(names.map((name, i) => [name, cleaned(replaced[i]!)]));
      return this.numbers(condition, this.table.assign(table(filled)));
    }) as [number[], number[]];
    return unknown.map((is, row) => is && (isTrue(large[row]!) || isTrue(small[row]!)));
  }
}

/** A condition as `numbers` gives it. */
export function isTrue(value: number): boolean {
  return value !== 0 && !Number.isNaN(value);
}

function reference(source: Source, name: string): string {
  if (source === "d") return `d[${JSON.stringify(name)}]`;
  if (source === "value") return `d[${JSON.stringify(VALUE_COLUMN)}]`;
  return `$[${JSON.stringify(parameter(source, name))}]`;
}

function parameter(source: "plan" | "dataset", name: string): string {
  return `${source}.${name}`;
}

function columnOf(measure: Measure, name: string): unknown[] {
  const names = measure.table.columnNames();
  if (!names.includes(name)) {
    const near = nearest(name, names);
    const hint = near === undefined ? "" : `: did you mean "${near}"?`;
    throw new NotJudgeable(`the measure "${measure.name}" has no column "${name}"${hint}`);
  }
  return Array.from(measure.table.array(name) as Iterable<unknown>);
}

/** In a column of numbers, null as NaN: in arithmetic it would count as 0. */
function cleaned(column: unknown[]): unknown[] {
  const words = column.some((value) => typeof value === "string");
  if (words) return column;
  return column.map((value) =>
    typeof value === "boolean" ? value : typeof value === "bigint" ? Number(value) : (value ?? Number.NaN),
  );
}

function datasetValue(measures: Measures, name: string): unknown {
  const dataset = measures.get("dataset");
  if (dataset === undefined) throw new NotJudgeable('there is no measure "dataset"');
  return cleaned(columnOf(dataset, name))[0] ?? Number.NaN;
}
