/** Records of arrays that are as long as each other. */
import type { StateReader } from "./reader.ts";
import type { ArrayKind, StateArray, StateRecord } from "./value.ts";

/** The first `used` numbers of each column, without a copy. */
export function usedOf(columns: object, used: number): StateRecord {
  const entries = Object.entries(columns as Record<string, StateArray>);
  return Object.fromEntries(entries.map(([name, column]) => [name, column.subarray(0, used)]));
}

/** Columns of the names and kinds of `like`. */
export function readColumns<C extends object>(from: StateReader, like: C, length: number): C {
  const entries = Object.entries(like as Record<string, StateArray>);
  return Object.fromEntries(
    entries.map(([name, column]) => [name, from.array(column.constructor as ArrayKind, name, length)]),
  ) as C;
}
