/** A copy with flags read back and laid beside what it should be, sample by sample, in one pass over both. */
import type { Dataset, SampleBlock } from "../../dataset/dataset.ts";

/** Where two datasets differ, for a person to read; null where they do not. */
export type Difference = string | null;

export interface Verified {
  readonly difference: Difference;
  /** samples of the copy with a finite weight above zero */
  readonly unflagged: number;
}

/** @param expected the original with the flags laid over it */
export async function compareDatasets(expected: Dataset, copy: Dataset): Promise<Verified> {
  const tables = tablesDiffer(expected, copy);
  if (tables !== null) return { difference: tables, unflagged: 0 };
  const rowSamples = copy.shape.subbands * copy.shape.channels * copy.shape.polarizations;
  let unflagged = 0;
  const [a, b] = [new Reader(expected), new Reader(copy)];
  try {
    for (;;) {
      const rows = Math.min(await a.ready(), await b.ready());
      if (rows === 0) return { difference: null, unflagged };
      const difference = rowsDiffer(a, b, rows, rowSamples);
      if (difference !== null) return { difference, unflagged };
      unflagged += countUsable(b.block!.weight, b.at * rowSamples, rows * rowSamples);
      a.at += rows;
      b.at += rows;
    }
  } finally {
    await a.close();
    await b.close();
  }
}

/** Blocks of rows; two readers of different formats cut them differently. */
class Reader {
  block: SampleBlock | undefined;
  /** row of the block that is looked at next */
  at = 0;
  readonly #blocks: AsyncIterator<SampleBlock>;

  constructor(dataset: Dataset) {
    this.#blocks = dataset.blocks({ want: "samples" })[Symbol.asyncIterator]();
  }

  /** Rows at hand; 0 at the end. */
  async ready(): Promise<number> {
    while (this.block === undefined || this.at === this.block.rows) {
      const next = await this.#blocks.next();
      if (next.done === true) return 0;
      this.block = next.value;
      this.at = 0;
    }
    return this.block.rows - this.at;
  }

  async close(): Promise<void> {
    await this.#blocks.return?.();
  }
}

const ROW_COLUMNS = [
  "time",
  "u",
  "v",
  "w",
  "antenna1",
  "antenna2",
  "subarray",
  "field",
  "setup",
  "integration",
] as const;

function rowsDiffer(a: Reader, b: Reader, rows: number, rowSamples: number): Difference {
  const [one, two] = [a.block!, b.block!];
  const named = (at: number, what: string, expected: number, found: number) =>
    `row ${one.firstRow + a.at + at + 1}: ${what} is ${found}, expected ${expected}`;
  for (const name of ROW_COLUMNS) {
    const at = firstDifference(one[name], a.at, two[name], b.at, rows);
    if (at >= 0) return named(at, name, one[name][a.at + at]!, two[name][b.at + at]!);
  }
  const [from, to, count] = [a.at * rowSamples, b.at * rowSamples, rows * rowSamples];
  for (const name of ["real", "imag"] as const) {
    const at = firstDifference(one[name], from, two[name], to, count);
    if (at >= 0) return named(Math.floor(at / rowSamples), name, one[name][from + at]!, two[name][to + at]!);
  }
  const at = firstWeightDifference(one.weight, from, two.weight, to, count);
  if (at < 0) return null;
  return named(Math.floor(at / rowSamples), "a weight", one.weight[from + at]!, two.weight[to + at]!);
}

type Numbers = Float64Array | Float32Array | Int32Array;

/** The usual case, told at the speed of memory. */
function sameBytes(a: Numbers, from: number, b: Numbers, to: number, count: number): boolean {
  const bytes = (array: Numbers, first: number) =>
    Buffer.from(
      array.buffer,
      array.byteOffset + first * array.BYTES_PER_ELEMENT,
      count * array.BYTES_PER_ELEMENT,
    );
  return bytes(a, from).equals(bytes(b, to));
}

/** Index from `a[from]` of the first that is not the same, a NaN being the same as another; -1 none. */
function firstDifference(a: Numbers, from: number, b: Numbers, to: number, count: number): number {
  if (sameBytes(a, from, b, to, count)) return -1;
  for (let i = 0; i < count; i++) {
    const x = a[from + i]!;
    const y = b[to + i]!;
    if (x !== y && !(Number.isNaN(x) && Number.isNaN(y))) return i;
  }
  return -1;
}

/** Of infinite weights the sign does not matter: both are bad. */
function firstWeightDifference(
  a: Float32Array,
  from: number,
  b: Float32Array,
  to: number,
  count: number,
): number {
  if (sameBytes(a, from, b, to, count)) return -1;
  for (let i = 0; i < count; i++) {
    const x = a[from + i]!;
    const y = b[to + i]!;
    if (x !== y && (Number.isFinite(x) || Number.isFinite(y))) return i;
  }
  return -1;
}

function countUsable(weight: Float32Array, from: number, count: number): number {
  let usable = 0;
  const end = from + count;
  for (let i = from; i < end; i++) {
    const value = weight[i]!;
    if (value > 0 && value < Number.POSITIVE_INFINITY) usable += 1;
  }
  return usable;
}

/** The small tables. */
function tablesDiffer(expected: Dataset, copy: Dataset): Difference {
  if (expected.rows !== copy.rows) return `it has ${copy.rows} rows, expected ${expected.rows}`;
  for (const part of ["shape", "polarizations", "array", "fields", "setups", "unit"] as const) {
    const [one, two] = [expected[part], copy[part]].map((value) => JSON.stringify(value, plain));
    if (one !== two) return `its ${part} read differently`;
  }
  return null;
}

/** Typed arrays as lists, and numbers that JSON does not have as text. */
function plain(_: string, value: unknown): unknown {
  if (value instanceof Float64Array) return Array.from(value, String);
  return typeof value === "number" && !Number.isFinite(value) ? String(value) : value;
}
