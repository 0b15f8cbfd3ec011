/**
 * JSON for reports: keys in the order they are given, numbers without the digits that mean nothing, and not-a-number
 * as null. The same values give the same bytes.
 */

/** Enough for every measure here: single-precision data have seven digits. */
const DIGITS = 7;

/** A value whose numbers are kept to the last bit: an MJD chooses integrations, a position wants its millimetres. */
export class Exactly {
  readonly value: unknown;

  constructor(value: unknown) {
    this.value = value;
  }
}

export function exactly(value: unknown): Exactly {
  return new Exactly(value);
}

/** `value` as plain objects and arrays, ready for `JSON.stringify`. Keys whose value is undefined are left out. */
export function trimmed(value: unknown, exact = false): unknown {
  if (value instanceof Exactly) return trimmed(value.value, true);
  if (typeof value === "number") return trimmedNumber(value, exact);
  if (typeof value === "bigint") return Number(value);
  if (value === null || typeof value !== "object") return value;
  if (Array.isArray(value) || ArrayBuffer.isView(value)) {
    return Array.from(value as ArrayLike<unknown>, (item) => trimmed(item, exact));
  }
  const parts = Object.entries(value).map(([key, item]) => [key, trimmed(item, exact)] as const);
  return Object.fromEntries(parts.filter(([, item]) => item !== undefined));
}

function trimmedNumber(value: number, exact: boolean): number | null {
  if (!Number.isFinite(value)) return null;
  const kept = exact || Number.isInteger(value) ? value : Number(value.toPrecision(DIGITS));
  return kept === 0 ? 0 : kept;
}

/** Invisible and direction-changing characters that JSON allows as they are but a terminal would obey. */
const INVISIBLE = /[\p{Cc}\p{Cf}\p{Zl}\p{Zp}]/gu;

/** Indented JSON, lists of plain values on one line, with a line end. What cannot be seen is written as escapes. */
export function jsonText(value: unknown): string {
  return `${laidOut(trimmed(value), "")}\n`;
}

function laidOut(value: unknown, margin: string): string {
  if (value === null || typeof value !== "object") return plain(value);
  const inner = `${margin}  `;
  if (Array.isArray(value)) {
    if (value.every(isPlain)) return `[${value.map(plain).join(", ")}]`;
    return block(
      "[",
      value.map((item) => laidOut(item, inner)),
      "]",
      margin,
    );
  }
  const parts = Object.entries(value).map(([key, item]) => `${plain(key)}: ${laidOut(item, inner)}`);
  return parts.length === 0 ? "{}" : block("{", parts, "}", margin);
}

/** A value that takes no line of its own; a pair such as a channel range is one. */
function isPlain(value: unknown): boolean {
  if (Array.isArray(value))
    return value.length <= 2 && value.every((item) => !Array.isArray(item) && isPlain(item));
  return value === null || typeof value !== "object";
}

function plain(value: unknown): string {
  if (Array.isArray(value)) return `[${value.map(plain).join(", ")}]`;
  return JSON.stringify(value).replace(INVISIBLE, escaped);
}

function block(open: string, parts: readonly string[], close: string, margin: string): string {
  const inner = `${margin}  `;
  return `${open}\n${parts.map((part) => inner + part).join(",\n")}\n${margin}${close}`;
}

function escaped(character: string): string {
  return Array.from({ length: character.length }, (_, i) => {
    return `\\u${character.charCodeAt(i).toString(16).padStart(4, "0")}`;
  }).join("");
}
