/**
 * A rule's consequence: a sentence with `{placeholders}`. A placeholder is an expression of the rule language, with
 * `as unit` when its unit is not the column's own: `{d.w_loss_edge as fraction}`, `{1 / d.ratio as ratio}`. The bare
 * names are `value`, `caution`, `hold` (all in the rule's unit), `scope` (whom it concerns) and `count` (how many).
 * `{{` and `}}` are braces.
 */
import { nearest } from "../util/errors.ts";
import { type Expression, parseExpression } from "./expression.ts";
import { ExpressionError } from "./expression-error.ts";
import { type PlanKeyName, planUnit } from "./plan-values.ts";
import { formatQuantity, QUANTITY_UNITS } from "./quantity.ts";

const BARE = ["value", "caution", "hold", "scope", "count"] as const;
export type BareName = (typeof BARE)[number];

export type Part =
  | { readonly kind: "words"; readonly text: string }
  | { readonly kind: "bare"; readonly name: BareName }
  | { readonly kind: "quantity"; readonly expression: Expression; readonly unit: string | null };

export interface Template {
  /** as written */
  readonly text: string;
  readonly parts: readonly Part[];
}

const LONGEST_TEXT = 2000;
const UNIT = /^(.*)\sas\s+(\S+)\s*$/s;

/**
 * @throws ExpressionError with the character at fault: an unknown placeholder or unit, or a brace without its partner
 */
export function parseTemplate(text: string): Template {
  if (text.length > LONGEST_TEXT) {
    throw new ExpressionError(`a text of ${text.length} characters: at most ${LONGEST_TEXT}`, 0);
  }
  const parts: Part[] = [];
  let words = "";
  let at = 0;
  while (at < text.length) {
    const two = text.slice(at, at + 2);
    if (two === "{{" || two === "}}") {
      words += two[0];
      at += 2;
    } else if (text[at] === "{") {
      const end = text.indexOf("}", at);
      if (end < 0) throw new ExpressionError('"{" without its "}"', at);
      if (words !== "") parts.push({ kind: "words", text: words });
      words = "";
      parts.push(placeholder(text.slice(at + 1, end), at + 1));
      at = end + 1;
    } else if (text[at] === "}") {
      throw new ExpressionError('"}" without its "{"', at);
    } else {
      words += text[at];
      at += 1;
    }
  }
  if (words !== "") parts.push({ kind: "words", text: words });
  return { text, parts };
}

function placeholder(inner: string, at: number): Part {
  const name = inner.trim();
  if ((BARE as readonly string[]).includes(name)) return { kind: "bare", name: name as BareName };
  if (/^[A-Za-z_]\w*$/.test(name)) {
    const near = nearest(name, BARE);
    const hint =
      near === undefined ? "write {d.column}, {plan.key} or {dataset.column}" : `did you mean {${near}}?`;
    throw new ExpressionError(`unknown placeholder {${name}}: ${hint}`, at);
  }
  const withUnit = UNIT.exec(inner);
  const unit = withUnit?.[2] ?? null;
  if (unit !== null && !QUANTITY_UNITS.includes(unit)) {
    const near = nearest(unit, QUANTITY_UNITS);
    const hint = near === undefined ? `units are ${QUANTITY_UNITS.join(", ")}` : `did you mean "${near}"?`;
    throw new ExpressionError(`unknown unit "${unit}" in {${name}}: ${hint}`, at + inner.lastIndexOf(unit));
  }
  try {
    const parsed = parseExpression(withUnit?.[1] ?? inner);
    const names = parsed.names.map((name) => ({ ...name, at: name.at + at }));
    return { kind: "quantity", expression: { ...parsed, names }, unit };
  } catch (error) {
    if (!(error instanceof ExpressionError)) throw error;
    throw new ExpressionError(`in {${name}}: ${error.message}`, at + error.at);
  }
}

/** The expressions of a template, in its order: one value of each fills it. */
export function templateExpressions(template: Template): Expression[] {
  return template.parts.flatMap((part) => (part.kind === "quantity" ? [part.expression] : []));
}

/** What fills the bare names and the expressions of one finding. */
export interface Filling {
  readonly bare: Readonly<Record<BareName, string>>;
  /** the value behind the bare `value`, and its unit */
  readonly value: number;
  readonly valueUnit: string;
  /** one a template expression, in order: a number, or words */
  readonly values: readonly unknown[];
  /** unit of a column of the measure ("d") or of the dataset measure */
  readonly unitOf: (source: "d" | "dataset", name: string) => string;
}

export interface FilledText {
  readonly text: string;
  /** the first number of the text that the data give (not a limit, a count or the plan), with its unit */
  readonly value?: number;
  readonly unit?: string;
}

export function fillTemplate(template: Template, filling: Filling): FilledText {
  let text = "";
  let first: { value: number; unit: string } | undefined;
  let next = 0;
  for (const part of template.parts) {
    if (part.kind === "words") text += part.text;
    else if (part.kind === "bare") {
      text += filling.bare[part.name];
      if (part.name === "value") first ??= { value: filling.value, unit: filling.valueUnit };
    } else {
      const value = filling.values[next++];
      const unit = part.unit ?? ownUnit(part.expression, filling);
      text += typeof value === "number" ? formatQuantity(value, unit) : String(value ?? "unknown");
      const given = part.expression.names.every(({ source }) => source === "plan" || source === "dataset");
      // Shown in degrees, a phase is still a number of radians.
      if (typeof value === "number" && !given) first ??= { value, unit: unit === "phase" ? "rad" : unit };
    }
  }
  return { text, ...first };
}

/** The unit of an expression that is one name alone; nothing otherwise. */
function ownUnit(expression: Expression, filling: Filling): string {
  const { root } = expression;
  if (root.kind !== "name") return "";
  if (root.source === "value") return filling.valueUnit;
  if (root.source === "plan") return planUnit(root.name as PlanKeyName);
  return filling.unitOf(root.source, root.name);
}
