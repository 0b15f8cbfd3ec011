/** Expressions of a rule over the rows of its measure, compiled by arquero. */
import { type ColumnTable, table } from "arquero";
import type { Plan } from "../imaging/plan.ts";
import type { Measure, Measures } from "../measure/table.ts";
import { nearest } from "../util/errors.ts";
import { arqueroText, type Expression, type Node, type Source } from "./expression.ts";
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
  /** what plan and dataset say, by name in the arquero text */
  private readonly parameters: ReadonlyMap<string, unknown>;

  /**
   * @throws NotJudgeable when a column that the expressions name is not there
   */
  constructor(measure: Measure, expressions: readonly Expression[], plan: Plan, measures: Measures) {
    this.measure = measure;
    this.rows = measure.table.numRows();
    const columns: Record<string, unknown[]> = {};
    const parameters = new Map<string, unknown>();
    for (const { source, name } of expressions.flatMap((expression) => expression.names)) {
      if (source === "d") columns[name] = cleaned(columnOf(measure, name));
      else if (source === "plan" && isPlanKey(name))
        parameters.set(parameter(source, name), planValue(plan, name));
      else if (source === "dataset") parameters.set(parameter(source, name), datasetValue(measures, name));
    }
    // A table without a column has no rows; this one has as many as the measure.
    columns[VALUE_COLUMN] = new Array(this.rows).fill(Number.NaN);
    this.table = table(columns).params(Object.fromEntries(parameters)) as ColumnTable;
    this.parameters = parameters;
  }

  /** One value a row; `value` holds what the rule computed. */
  evaluate(expression: Expression, value: readonly number[]): unknown[] {
    return this.run(expression.root, this.table.assign(table({ [VALUE_COLUMN]: [...value] })));
  }

  /** One number a row: true is 1, false 0, and everything else that is no number NaN. */
  numbers(expression: Expression): number[] {
    return this.run(expression.root, this.table).map((value) =>
      typeof value === "number" ? value : typeof value === "boolean" ? Number(value) : Number.NaN,
    );
  }

  private run(node: Node, input: ColumnTable): unknown[] {
    if (this.rows === 0) return [];
    const text = arqueroText(node, reference);
    return Array.from(input.derive({ [RESULT_COLUMN]: text }).array(RESULT_COLUMN) as Iterable<unknown>);
  }

  /**
   * Whether each row meets a condition: null where that hangs on a number of the data that is not known (NaN; a null
   * says that there is none, and meets nothing). Unknown or true is true, unknown and false is false (Kleene 1938).
   */
  condition(expression: Expression): (boolean | null)[] {
    return this.rows === 0 ? [] : this.truths(expression.root);
  }

  private truths(node: Node): (boolean | null)[] {
    if (node.kind === "unary" && node.operator === "!") {
      return this.truths(node.operand).map((truth) => (truth === null ? null : !truth));
    }
    if (node.kind === "binary" && (node.operator === "&&" || node.operator === "||")) {
      const decisive = node.operator === "||";
      const left = this.truths(node.left);
      const right = this.truths(node.right);
      return left.map((truth, row) => {
        if (truth === decisive || right[row] === decisive) return decisive;
        return truth === null || right[row] === null ? null : !decisive;
      });
    }
    // What asks whether a number is known has an answer either way.
    const answers = node.kind === "call";
    const unknown = answers ? () => false : this.unknownIn(node);
    return this.run(node, this.table).map((value, row) => {
      if (unknown(row)) return null;
      return typeof value === "number" ? value !== 0 && !Number.isNaN(value) : Boolean(value);
    });
  }

  /** Whether a number that part of a condition reads is not known in a row. */
  private unknownIn(node: Node): (row: number) => boolean {
    const names = namesIn(node);
    const columns = names.flatMap(({ source, name }) =>
      source === "d" ? [columnOf(this.measure, name)] : [],
    );
    const everywhere = names.some(
      ({ source, name }) =>
        source === "dataset" && Number.isNaN(this.parameters.get(parameter(source, name))),
    );
    return (row) => everywhere || columns.some((column) => Number.isNaN(column[row]));
  }
}

function namesIn(node: Node): { readonly source: Source; readonly name: string }[] {
  switch (node.kind) {
    case "name":
      return [node];
    case "unary":
      return namesIn(node.operand);
    case "binary":
      return [node.left, node.right].flatMap(namesIn);
    case "choice":
      return [node.test, node.yes, node.no].flatMap(namesIn);
    case "call":
      return node.arguments.flatMap(namesIn);
    default:
      return [];
  }
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
