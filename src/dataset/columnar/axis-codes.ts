/** Numbers and names of sub-bands and channels as indices from 0. */
import { InputError } from "../../util/errors.ts";
import type { Notes } from "../notes.ts";
import type { Label } from "./labels.ts";

/**
 * Labels to indices. With a size known the labels are numbers that count from 0 or 1; without one they are taken in
 * order, whatever they are.
 */
export function axisCodes(
  labels: readonly Label[],
  size: number | undefined,
  from: number | undefined,
  what: string,
  notes: Notes,
  file: string,
): Map<Label, number> {
  if (size === undefined && from === undefined) return new Map(labels.map((label, index) => [label, index]));
  const strange = labels.find((label) => typeof label !== "number" || !Number.isInteger(label));
  if (strange !== undefined) {
    throw new InputError(`"${strange}" is no number of a ${what}: expected whole numbers`, { file });
  }
  const numbers = labels as readonly number[];
  const least = numbers.reduce((a, b) => Math.min(a, b), Number.POSITIVE_INFINITY);
  const first = from ?? (least === 0 ? 0 : 1);
  if (from === undefined && first === 1) {
    notes.note("counted-from-one", `${what}s are counted from 1 in the table, and from 0 in the reports`);
  }
  const most = numbers.reduce((a, b) => Math.max(a, b), 0);
  const expected = size ?? most - first + 1;
  if (least < first || most - first >= expected) {
    throw new InputError(
      `${what}s run from ${least} to ${most}: expected ${first} to ${first + expected - 1}`,
      { file },
      `The column map says how many there are, and may say "from", the number of the first`,
    );
  }
  return new Map(numbers.map((number) => [number, number - first]));
}
