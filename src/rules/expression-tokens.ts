/** Words of the rule language. */
import { ExpressionError } from "./expression-error.ts";

export type TokenKind = "number" | "text" | "name" | "operator" | "end";

export interface Token {
  readonly kind: TokenKind;
  /** a text without its quotes */
  readonly text: string;
  /** character of the expression, from 0 */
  readonly at: number;
}

const SPACE = /[ \t\r\n]+/y;
const NUMBER = /(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?/y;
const NAME = /[A-Za-z_][A-Za-z0-9_]*/y;
/** no escapes: a text with a backslash or a line end is refused */
const TEXT = /"[^"\\\r\n]*"|'[^'\\\r\n]*'/y;
const OPERATOR = /===|!==|==|!=|<=|>=|&&|\|\||\*\*|[-+*/%<>!?:().,]/y;

/** @throws ExpressionError at the first character that begins no word of the language */
export function tokenize(text: string): Token[] {
  const tokens: Token[] = [];
  let at = 0;
  const match = (pattern: RegExp): string | undefined => {
    pattern.lastIndex = at;
    return pattern.exec(text)?.[0];
  };
  while (at < text.length) {
    const space = match(SPACE);
    if (space !== undefined) {
      at += space.length;
      continue;
    }
    const token = wordAt(at, match);
    if (token === undefined) {
      throw new ExpressionError(`"${[...text.slice(at)][0]}" is not part of the rule language`, at);
    }
    tokens.push(token);
    at += token.text.length + (token.kind === "text" ? 2 : 0);
  }
  tokens.push({ kind: "end", text: "", at: text.length });
  return tokens;
}

function wordAt(at: number, match: (pattern: RegExp) => string | undefined): Token | undefined {
  const number = match(NUMBER);
  if (number !== undefined) {
    if (!Number.isFinite(Number(number))) throw new ExpressionError(`${number} is too large`, at);
    return { kind: "number", text: number, at };
  }
  const name = match(NAME);
  if (name !== undefined) return { kind: "name", text: name, at };
  const quoted = match(TEXT);
  if (quoted !== undefined) return { kind: "text", text: quoted.slice(1, -1), at };
  const operator = match(OPERATOR);
  return operator === undefined ? undefined : { kind: "operator", text: operator, at };
}
