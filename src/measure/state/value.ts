/**
 * The state of an accumulator as plain data: what threads hand each other and files hold. Keys keep the order in which
 * they are given.
 */

export type StateArray =
  | Int8Array
  | Uint8Array
  | Int16Array
  | Uint16Array
  | Int32Array
  | Uint32Array
  | Float32Array
  | Float64Array;

export type StateValue =
  | null
  | boolean
  | number
  | string
  | StateArray
  | readonly StateValue[]
  | { readonly [key: string]: StateValue };

export interface StateRecord {
  readonly [key: string]: StateValue;
}

/** Kinds of arrays; a kind's place in the list is its number in a file. */
export const ARRAY_KINDS = [
  Int8Array,
  Uint8Array,
  Int16Array,
  Uint16Array,
  Int32Array,
  Uint32Array,
  Float32Array,
  Float64Array,
] as const;
export type ArrayKind = (typeof ARRAY_KINDS)[number];

/** The first byte of a value in a file. Arrays have `TAG_ARRAY` and the number of their kind. */
export const TAG_NULL = 0;
export const TAG_FALSE = 1;
export const TAG_TRUE = 2;
export const TAG_NUMBER = 3;
export const TAG_TEXT = 4;
export const TAG_LIST = 5;
export const TAG_RECORD = 6;
export const TAG_ARRAY = 16;

/** The numbers of arrays begin at multiples of this, so that they can be used where they lie. */
export const ALIGNMENT = 8;
/** Values inside values: real ones go half as deep. */
export const MOST_DEEP = 16;

/** The buffers of all arrays of a state, each once: those that may be transferred to another thread. */
export function buffersOf(value: StateValue): ArrayBuffer[] {
  const found = new Set<ArrayBuffer>();
  const visit = (inner: StateValue): void => {
    if (inner === null || typeof inner !== "object") return;
    if (ArrayBuffer.isView(inner)) {
      if (inner.buffer instanceof ArrayBuffer) found.add(inner.buffer);
    } else for (const each of Object.values(inner)) visit(each);
  };
  visit(value);
  return [...found];
}
