/**
 * The language of rule files: arquero expressions, cut down to what a stranger's text may say. A text is parsed here by
 * list of what is allowed, and only what this parser built is printed for arquero to compile; the text itself never is.
 *
 * Allowed: `d.column`, `plan.key`, `dataset.column`, `value`, PI, numbers, texts (only to be compared), true, false,
 * `+ - * / % **`, comparisons, `&& || !`, `? :`, parentheses and the functions of `FUNCTIONS` as `op.name(...)`.
 */
import { nearest } from "../util/errors.ts";
import { ExpressionError } from "./expression-error.ts";
import { type Token, type TokenKind, tokenize } from "./expression-tokens.ts";
import { isPlanKey, PLAN_KEYS } from "./plan-values.ts";

/** Where a name is looked up: a column of the measure, the plan, the dataset measure, or the rule's own value. */
export type Source = "d" | "plan" | "dataset" | "value";

export type Node =
  | { readonly kind: "number"; readonly value: number }
  | { readonly kind: "text"; readonly value: string }
  | { readonly kind: "boolean"; readonly value: boolean }
  | { readonly kind: "pi" }
  | { readonly kind: "name"; readonly source: Source; readonly name: string }
  | { readonly kind: "unary"; readonly operator: string; readonly operand: Node }
  | { readonly kind: "binary"; readonly operator: string; readonly left: Node; readonly right: Node }
  | { readonly kind: "choice"; readonly test: Node; readonly yes: Node; readonly no: Node }
  | { readonly kind: "call"; readonly name: string; readonly arguments: readonly Node[] };

export interface Expression {
  /** as written */
  readonly text: string;
  readonly root: Node;
  /** every name it reads, in the order of the text */
  readonly names: readonly NameRead[];
}

export interface NameRead {
  readonly source: Source;
  readonly name: string;
  /** character of the text, from 0 */
  readonly at: number;
}

/** Functions of arquero that a rule may call: [fewest, most] arguments. None of them aggregates or loops. */
const FUNCTIONS: ReadonlyMap<string, readonly [number, number]> = new Map([
  ...["abs", "acos", "asin", "atan", "cbrt", "ceil", "cos", "degrees", "exp", "expm1", "floor"].map(one),
  ...["log", "log10", "log1p", "log2", "radians", "round", "sign", "sin", "sqrt", "tan"].map(one),
  ...["is_finite", "is_nan"].map(one),
  ["atan2", [2, 2]],
  ["pow", [2, 2]],
  ["greatest", [1, 8]],
  ["least", [1, 8]],
]);

function one(name: string): [string, readonly [number, number]] {
  return [name, [1, 1]];
}

/** The names of the functions that a rule may call as `op.name(...)`. */
export const FUNCTION_NAMES: readonly string[] = [...FUNCTIONS.keys()];

const LONGEST_TEXT = 2000;
const DEEPEST = 60;
const BINARY: readonly (readonly string[])[] = [
  ["||"],
  ["&&"],
  ["==", "!=", "===", "!=="],
  ["<", "<=", ">", ">="],
  ["+", "-"],
  ["*", "/", "%"],
];

/**
 * @throws ExpressionError with the character at fault when the text is anything but the language above
 */
export function parseExpression(text: string): Expression {
  if (text.length > LONGEST_TEXT) {
    throw new ExpressionError(`an expression of ${text.length} characters: at most ${LONGEST_TEXT}`, 0);
  }
  const parser = new Parser(text);
  const root = parser.whole();
  return { text, root, names: parser.names };
}

class Parser {
  readonly names: NameRead[] = [];
  private readonly tokens: readonly Token[];
  private at = 0;
  private depth = 0;

  constructor(text: string) {
    this.tokens = tokenize(text);
  }

  whole(): Node {
    const root = this.choice();
    const left = this.peek();
    if (left.kind !== "end") {
      const hint = left.text === "." ? ": a column or value has no properties" : "";
      throw new ExpressionError(`"${left.text}" is not expected here${hint}`, left.at);
    }
    if (root.kind === "text") throw new ExpressionError("a text alone: texts can only be compared", 0);
    return root;
  }

  private choice(): Node {
    this.depth += 1;
    if (this.depth > DEEPEST) throw new ExpressionError("nested too deeply", this.peek().at);
    const test = this.binary(0);
    let node = test;
    if (this.take("?")) {
      const yes = this.choice();
      this.need(":");
      const no = this.choice();
      this.refuseText(yes, no);
      node = { kind: "choice", test, yes, no };
    }
    this.depth -= 1;
    return node;
  }

  private binary(level: number): Node {
    const operators = BINARY[level];
    if (operators === undefined) return this.power();
    let left = this.binary(level + 1);
    for (;;) {
      const token = this.peek();
      if (token.kind !== "operator" || !operators.includes(token.text)) return left;
      this.at += 1;
      const right = this.binary(level + 1);
      const comparesTexts = token.text.startsWith("==") || token.text.startsWith("!=");
      if (!comparesTexts) this.refuseText(left, right);
      left = { kind: "binary", operator: token.text, left, right };
    }
  }

  private power(): Node {
    const left = this.unary();
    if (!this.take("**")) return left;
    this.depth += 1;
    if (this.depth > DEEPEST) throw new ExpressionError("nested too deeply", this.peek().at);
    const right = this.power();
    this.depth -= 1;
    this.refuseText(left, right);
    return { kind: "binary", operator: "**", left, right };
  }

  private unary(): Node {
    for (const operator of ["-", "+", "!"]) {
      if (!this.take(operator)) continue;
      this.depth += 1;
      if (this.depth > DEEPEST) throw new ExpressionError("nested too deeply", this.peek().at);
      const operand = this.unary();
      this.depth -= 1;
      this.refuseText(operand);
      return { kind: "unary", operator, operand };
    }
    return this.primary();
  }

  private primary(): Node {
    const token = this.peek();
    this.at += 1;
    if (token.kind === "number") return { kind: "number", value: Number(token.text) };
    if (token.kind === "text") return { kind: "text", value: token.text };
    if (token.kind === "name") return this.named(token);
    if (token.text === "(") {
      const inner = this.choice();
      this.need(")");
      return inner;
    }
    const found = token.kind === "end" ? "the expression ends" : `"${token.text}" stands`;
    throw new ExpressionError(`${found} where a value is expected`, token.at);
  }

  private named(token: Token): Node {
    switch (token.text) {
      case "true":
      case "false":
        return { kind: "boolean", value: token.text === "true" };
      case "PI":
        return { kind: "pi" };
      case "value":
        return this.name("value", "value", token.at);
      case "op":
        return this.call();
      case "d":
      case "plan":
      case "dataset":
        return this.member(token.text);
    }
    const hint = FUNCTIONS.has(token.text)
      ? `: functions are called as op.${token.text}(...)`
      : ": names are d.column, plan.key, dataset.column, value and PI";
    throw new ExpressionError(`unknown name "${token.text}"${hint}`, token.at);
  }

  private member(source: "d" | "plan" | "dataset"): Node {
    this.need(".");
    const token = this.needKind("name");
    // What every object has is no column, whatever a table says.
    if (token.text.startsWith("_") || token.text in Object.prototype) {
      throw new ExpressionError(`"${token.text}" is no column`, token.at);
    }
    if (source === "plan" && !isPlanKey(token.text)) {
      const near = nearest(token.text, PLAN_KEYS);
      const hint = near === undefined ? `keys are ${PLAN_KEYS.join(", ")}` : `did you mean plan.${near}?`;
      throw new ExpressionError(`the plan has no "${token.text}": ${hint}`, token.at);
    }
    return this.name(source, token.text, token.at);
  }

  private name(source: Source, name: string, at: number): Node {
    this.names.push({ source, name, at });
    return { kind: "name", source, name };
  }

  private call(): Node {
    this.need(".");
    const token = this.needKind("name");
    const arity = FUNCTIONS.get(token.text);
    if (arity === undefined) {
      const near = nearest(token.text, FUNCTIONS.keys());
      const hint =
        near === undefined ? `functions are ${FUNCTION_NAMES.join(", ")}` : `did you mean op.${near}?`;
      throw new ExpressionError(`op.${token.text} may not be called in a rule: ${hint}`, token.at);
    }
    this.need("(");
    const given: Node[] = [];
    if (!this.take(")")) {
      do given.push(this.choice());
      while (this.take(","));
      this.need(")");
    }
    this.refuseText(...given);
    const [fewest, most] = arity;
    if (given.length < fewest || given.length > most) {
      const wanted = fewest === most ? `${fewest}` : `${fewest} to ${most}`;
      throw new ExpressionError(`op.${token.text} takes ${wanted} values, not ${given.length}`, token.at);
    }
    return { kind: "call", name: token.text, arguments: given };
  }

  private refuseText(...nodes: readonly Node[]): void {
    if (nodes.some((node) => node.kind === "text")) {
      throw new ExpressionError("a text can only be compared with == or !=", this.peek().at);
    }
  }

  private peek(): Token {
    return this.tokens[Math.min(this.at, this.tokens.length - 1)]!;
  }

  private take(text: string): boolean {
    const token = this.peek();
    if (token.kind !== "operator" || token.text !== text) return false;
    this.at += 1;
    return true;
  }

  private need(text: string): void {
    const token = this.peek();
    if (this.take(text)) return;
    const found = token.kind === "end" ? "the expression ends" : `"${token.text}" stands`;
    throw new ExpressionError(`${found} where "${text}" is expected`, token.at);
  }

  private needKind(kind: TokenKind): Token {
    const token = this.peek();
    this.at += 1;
    if (token.kind === kind) return token;
    const found = token.kind === "end" ? "the expression ends" : `"${token.text}" stands`;
    throw new ExpressionError(`${found} where a ${kind} is expected`, token.at);
  }
}

/**
 * The expression as arquero compiles it, fully parenthesised, built from the parsed tree and from nothing else.
 *
 * @param column the arquero text that reads a name, such as `d["flagged_fraction"]`
 */
export function arqueroText(node: Node, column: (source: Source, name: string) => string): string {
  const text = (inner: Node): string => arqueroText(inner, column);
  switch (node.kind) {
    case "number":
      return String(node.value);
    case "text":
      return JSON.stringify(node.value);
    case "boolean":
      return String(node.value);
    case "pi":
      return "PI";
    case "name":
      return column(node.source, node.name);
    case "unary":
      return `(${node.operator}(${text(node.operand)}))`;
    case "binary":
      return `((${text(node.left)}) ${strict(node.operator)} (${text(node.right)}))`;
    case "choice":
      return `((${text(node.test)}) ? (${text(node.yes)}) : (${text(node.no)}))`;
    case "call":
      return `op.${node.name}(${node.arguments.map(text).join(", ")})`;
  }
}

/** A text never equals a number: no coercion. */
function strict(operator: string): string {
  return operator === "==" ? "===" : operator === "!=" ? "!==" : operator;
}
