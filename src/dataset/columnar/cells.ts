/** Cells of columns as numbers, names and yes or no; what is none of these is named with its row. */
import { InputError, type Place } from "../../util/errors.ts";

/** Made only where it is needed: there are as many places as cells. */
export type Where = () => Place;

const NOTHING = /^(?:|null|na|n\/a|none|-)$/i;
const NUMBER = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;

/** Nothing in it: an empty cell of text, or a null. */
export function isNothing(cell: unknown): boolean {
  if (cell === null || cell === undefined) return true;
  return typeof cell === "string" && (cell === "" || NOTHING.test(cell.trim()));
}

/**
 * The number in a cell; NaN where there is nothing in it.
 * @throws InputError when it is text that spells none, or of another type
 */
export function numberIn(cell: unknown, column: string, where: Where): number {
  if (typeof cell === "number") return cell;
  if (typeof cell === "bigint") return Number(cell);
  if (isNothing(cell)) return Number.NaN;
  if (typeof cell === "string") {
    const text = cell.trim();
    if (NUMBER.test(text)) return Number(text);
    if (/^[+-]?nan$/i.test(text)) return Number.NaN;
    const infinite = /^([+-]?)inf(inity)?$/i.exec(text);
    if (infinite !== null) return infinite[1] === "-" ? Number.NEGATIVE_INFINITY : Number.POSITIVE_INFINITY;
  }
  throw new InputError(`"${shown(cell)}" in column "${column}" is not a number`, where());
}

/** Yes or no; nothing in it is no. @throws InputError when it is neither */
export function isSet(cell: unknown, column: string, where: Where): boolean {
  if (typeof cell === "boolean") return cell;
  if (typeof cell === "number" || typeof cell === "bigint") {
    if (Number(cell) === 0 || Number(cell) === 1) return Number(cell) === 1;
  } else if (isNothing(cell)) return false;
  else if (typeof cell === "string") {
    const word = cell.trim().toLowerCase();
    if (["1", "true", "t", "yes", "y", "1.0"].includes(word)) return true;
    if (["0", "false", "f", "no", "n", "0.0"].includes(word)) return false;
  }
  throw new InputError(
    `"${shown(cell)}" in column "${column}" is no flag: expected true or false, or 1 or 0`,
    where(),
  );
}

/** A name or a number that stands for one; null where there is nothing. */
export function labelIn(cell: unknown): string | number | null {
  if (typeof cell === "number") return Number.isNaN(cell) ? null : cell;
  if (typeof cell === "bigint") return Number(cell);
  if (isNothing(cell)) return null;
  const text = String(cell).trim();
  return /^[+-]?\d{1,15}$/.test(text) ? Number(text) : text;
}

/**
 * The elements of a list cell; null where there is nothing. Text lists are written `[1 2 3]` or `[1, 2, 3]`.
 * @throws InputError when it is no list
 */
export function listIn(cell: unknown, column: string, where: Where): ArrayLike<unknown> | null {
  if (isNothing(cell)) return null;
  if (Array.isArray(cell) || ArrayBuffer.isView(cell)) return cell as unknown as ArrayLike<unknown>;
  if (typeof cell === "string") {
    const match = /^\s*\[([^\]]*)\]\s*$/.exec(cell);
    if (match !== null) return match[1]!.split(/[\s,;]+/).filter((part) => part !== "");
  }
  throw new InputError(`"${shown(cell)}" in column "${column}" is no list`, where());
}

function shown(cell: unknown): string {
  const text = typeof cell === "object" ? "a structure" : String(cell);
  return text.length > 40 ? `${text.slice(0, 40)}…` : text;
}
