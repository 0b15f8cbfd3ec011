/** The form of a rule file, and its errors with line, column and the nearest right spelling. */
import * as z from "zod";
import { InputError, nearest } from "../util/errors.ts";
import { type Expression, parseExpression } from "./expression.ts";
import { ExpressionError } from "./expression-error.ts";
import { FAMILIES, SUGGESTIONS } from "./finding.ts";
import type { Rule } from "./rule.ts";
import { parseTemplate } from "./template.ts";
import type { Path, YamlDocument } from "./yaml-document.ts";

/** Kinds of row that a rule may name in `each`. */
export const ROW_KINDS = [
  "dataset",
  "antenna",
  "baseline",
  "channel",
  "subband",
  "polarization",
  "field",
  "scan",
  "time",
  "event",
  "gap",
  "weighting",
] as const;

const text = (most: number) => z.string().trim().min(1).max(most);
const expression = z.union([z.string().trim().min(1), z.number(), z.boolean()]);
const id = z
  .string()
  .regex(/^[a-z][a-z0-9-]{0,59}$/, "lower-case letters, digits and hyphens, from a letter");

const FORM = z.strictObject({
  id,
  family: z.enum(FAMILIES),
  title: text(100),
  question: text(400),
  measure: z.string().regex(/^[a-z][a-z0-9_]{0,59}$/, "the name of a measure, in lower case"),
  where: expression.optional(),
  each: z.enum(ROW_KINDS),
  value: expression,
  unit: z.string().trim().max(20).default(""),
  limits: z.strictObject({ caution: expression, hold: expression }),
  weight: z.number().min(0).max(1),
  consequence: text(1000),
  suggests: z.enum(SUGGESTIONS),
  sources: z.array(text(300)).min(1).max(20),
  enabled: z.boolean().default(true),
});

/** A rule switched off needs its id and nothing else. */
const OFF = FORM.partial().required({ id: true });

export type RuleFile =
  | { readonly rule: Rule }
  | { readonly off: string; readonly place: InputError["place"] };

/** @throws InputError at the line and column of the first thing that is wrong */
export function readRule(document: YamlDocument, from: string): RuleFile {
  const off = isOff(document.value);
  const checked = (off ? OFF : FORM).safeParse(document.value);
  if (!checked.success) throw formError(document, checked.error.issues[0]!);
  if (off) return { off: checked.data.id, place: document.place(["id"]) };
  const form = checked.data as z.infer<typeof FORM>;
  const read = (path: Path, value: string | number | boolean) => readExpression(document, path, value);
  const limits = {
    caution: read(["limits", "caution"], form.limits.caution),
    hold: read(["limits", "hold"], form.limits.hold),
  };
  if (typeof form.limits.caution === "number" && form.limits.caution === form.limits.hold) {
    throw new InputError(
      `caution and hold are both ${form.limits.caution}: which way is worse?`,
      document.place(["limits"]),
      "Let them differ",
    );
  }
  const { id: _id, where, enabled: _enabled, ...same } = form;
  return {
    rule: {
      ...same,
      id: form.id,
      where: where === undefined ? null : read(["where"], where),
      value: read(["value"], form.value),
      limits,
      consequence: at(document, ["consequence"], () => parseTemplate(form.consequence)),
      from,
    },
  };
}

function isOff(value: unknown): boolean {
  return typeof value === "object" && value !== null && "enabled" in value && value.enabled === false;
}

function readExpression(document: YamlDocument, path: Path, value: string | number | boolean): Expression {
  return at(document, path, () => {
    const expression = parseExpression(String(value));
    const own = expression.text.indexOf("value");
    if (!expression.names.some((name) => name.source === "value")) return expression;
    throw new ExpressionError('"value" is what the rule computes here: only its consequence can use it', own);
  });
}

/** Give what is wrong with a text its place in the file. */
function at<T>(document: YamlDocument, path: Path, parse: () => T): T {
  try {
    return parse();
  } catch (error) {
    if (!(error instanceof ExpressionError)) throw error;
    const place = { ...document.characterPlace(path, error.at), part: path.join(".") };
    throw new InputError(error.message, place, undefined, { cause: error });
  }
}

function formError(document: YamlDocument, issue: z.core.$ZodIssue): InputError {
  const path = issue.path.map((step) => (typeof step === "symbol" ? String(step) : step));
  if (issue.code === "unrecognized_keys") {
    const key = issue.keys[0]!;
    const known = path.length === 0 ? Object.keys(FORM.shape) : Object.keys(FORM.shape.limits.shape);
    return new InputError(`unknown key "${key}"${spelling(key, known)}`, document.keyPlace(path, key));
  }
  const place = document.place(path);
  const value = valueAt(document.value, path);
  const name = path.length === 0 ? "a rule" : path.join(".");
  if (value === undefined) return new InputError(`${name} is missing`, place, "Every rule says it");
  if (issue.code === "invalid_value") {
    const known = issue.values.map(String);
    return new InputError(`${name} is ${shown(value)}${spelling(String(value), known)}`, place);
  }
  if (issue.code === "invalid_union") {
    return new InputError(`${name} is ${shown(value)}: expected a number or an expression`, place);
  }
  return new InputError(`${name} is ${shown(value)}: ${lowerFirst(issue.message)}`, place);
}

function spelling(word: string, known: readonly string[]): string {
  const near = nearest(word, known);
  return near === undefined ? `: expected one of ${known.join(", ")}` : `: did you mean "${near}"?`;
}

function shown(value: unknown): string {
  if (typeof value === "object" && value !== null) return Array.isArray(value) ? "a list" : "a map";
  const plain = JSON.stringify(value) ?? "nothing";
  return plain.length > 60 ? `${plain.slice(0, 57)}...` : plain;
}

function lowerFirst(message: string): string {
  return message.charAt(0).toLowerCase() + message.slice(1);
}

function valueAt(value: unknown, path: Path): unknown {
  let inner = value;
  for (const step of path) {
    if (typeof inner !== "object" || inner === null) return undefined;
    inner = (inner as Record<string | number, unknown>)[step];
  }
  return inner;
}
