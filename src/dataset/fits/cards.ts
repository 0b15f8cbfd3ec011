/**
 * One 80-character header card: keyword, value, comment. Free format by tokens, of which the fixed format is a case.
 * FITS Standard 4.0, sections 4.1 and 4.2. Cards are hostile: whatever 80 bytes come in, a Card comes out.
 */

/** A value that is none of the legal kinds, as it was written. */
export interface MalformedValue {
  readonly malformed: string;
}

export interface ComplexValue {
  readonly complex: readonly [number, number];
}

/** null: the keyword is there without a value. */
export type CardValue = string | number | boolean | null | ComplexValue | MalformedValue;

export interface Card {
  /** upper case, without the padding; empty for a blank card */
  readonly keyword: string;
  /** undefined: commentary, not a value card */
  readonly value: CardValue | undefined;
  /** after the slash, or the commentary text */
  readonly comment: string;
}

const NUMBER = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[EDed][+-]?\d+)?$/;

/** No value whatever stands in columns 9 and 10 (section 4.4.2.4). */
const COMMENTARY = ["", "COMMENT", "HISTORY"];

/** @param text 80 characters, one a byte */
export function parseCard(text: string): Card {
  const keyword = text.slice(0, 8).replaceAll("\0", " ").trim().toUpperCase();
  if (keyword === "CONTINUE" && /^ *'/.test(text.slice(8))) return { keyword, ...parseValue(text.slice(8)) };
  // The blank after the sign belongs there; "KEYWORD =value" is met.
  if (text[8] === "=" && !COMMENTARY.includes(keyword)) return { keyword, ...parseValue(text.slice(9)) };
  return { keyword, value: undefined, comment: text.slice(8).trimEnd() };
}

function parseValue(field: string): { value: CardValue; comment: string } {
  const start = field.search(/[^ \0]/);
  if (start === -1) return { value: null, comment: "" };
  if (field[start] === "'") return parseText(field, start);
  if (field[start] === "(") return parseComplex(field, start);
  const slash = field.indexOf("/", start);
  const token = field
    .slice(start, slash === -1 ? undefined : slash)
    .replaceAll("\0", " ")
    .trim();
  const comment = slash === -1 ? "" : field.slice(slash + 1).trim();
  return { value: parseToken(token), comment };
}

function parseToken(token: string): CardValue {
  if (token === "") return null;
  if (token === "T") return true;
  if (token === "F") return false;
  return NUMBER.test(token) ? toNumber(token) : { malformed: token };
}

function toNumber(token: string): number {
  return Number(token.replace(/[Dd]/, "E"));
}

/** A quote inside is doubled; blanks at the end do not count, blanks at the start do. */
function parseText(field: string, start: number): { value: CardValue; comment: string } {
  let text = "";
  let at = start + 1;
  for (;;) {
    const quote = field.indexOf("'", at);
    if (quote === -1) return { value: { malformed: field.slice(start).trimEnd() }, comment: "" };
    text += field.slice(at, quote);
    if (field[quote + 1] !== "'") {
      at = quote + 1;
      break;
    }
    text += "'";
    at = quote + 2;
  }
  const slash = field.indexOf("/", at);
  return {
    value: text.replace(/[ \0]+$/, ""),
    comment: slash === -1 ? "" : field.slice(slash + 1).trim(),
  };
}

function parseComplex(field: string, start: number): { value: CardValue; comment: string } {
  const end = field.indexOf(")", start);
  const parts = field
    .slice(start + 1, end === -1 ? undefined : end)
    .split(",")
    .map((part) => part.trim());
  if (end === -1 || parts.length !== 2 || !parts.every((part) => NUMBER.test(part))) {
    return { value: { malformed: field.slice(start).trimEnd() }, comment: "" };
  }
  const slash = field.indexOf("/", end);
  return {
    value: { complex: [toNumber(parts[0]!), toNumber(parts[1]!)] },
    comment: slash === -1 ? "" : field.slice(slash + 1).trim(),
  };
}
