/** From the stored items of rows to their columns: one pass a column, so that each loop is short and plain. */
import { InputError, type Place } from "../../util/errors.ts";
import type { SampleBlock } from "../dataset.ts";
import { readStored } from "../fits/stored.ts";
import type { Words } from "../fits-tables/words.ts";
import { type BaselineCode, decodeBaseline } from "./baselines.ts";
import type { RowColumns, Sum } from "./columns.ts";

/** Where the rows are: in memory and, for messages, in the file. */
export interface RawRows {
  readonly view: DataView;
  readonly rows: number;
  /** bytes from one row to the next in `view` */
  readonly stride: number;
  readonly firstRow: number;
  readonly place: Place;
  /** byte of the first row in the file, and from one row to the next */
  readonly byte: number;
  readonly rowBytes: number;
}

/** What the numbers in rows refer to. */
export interface RowContext {
  readonly columns: RowColumns;
  readonly words: Words;
  /** number of a frequency setup to its index */
  readonly setupIndex: ReadonlyMap<number, number>;
  /** the setup of rows whose number is not in the table; undefined: refuse them */
  readonly fallbackSetup: number | undefined;
  /** numbers met that are not in the table, for a note */
  readonly strangeSetups: Set<number>;
  /** of rows that name no field */
  readonly onlyField: number;
  /** file's time - UTC, days, by sub-array number; `timeOffset[0]` for those without a table */
  readonly timeOffset: Float64Array;
}

const MOST_STRANGE = 100;
/** Antenna numbers above this are damage, not antennas: the code itself reaches 2047. */
const MOST_ANTENNA = 65_535;

/**
 * Fill the row columns of `block`.
 *
 * @param scratch (rows) working space
 * @throws InputError at the row whose baseline, source or frequency setup is none
 */
export function fillRows(raw: RawRows, context: RowContext, scratch: Float64Array, block: SampleBlock): void {
  const { columns } = context;
  fillSum(raw, columns.u, block.u);
  fillSum(raw, columns.v, block.v);
  if (columns.w === undefined) block.w.fill(0, 0, raw.rows);
  else fillSum(raw, columns.w, block.w);
  fillAntennas(raw, context, scratch, block);
  fillTimes(raw, context, scratch, block);
  if (columns.integration === undefined) block.integration.fill(Number.NaN, 0, raw.rows);
  else fillIntegrations(raw, columns.integration, scratch, block.integration);
  fillFields(raw, context, scratch, block.field);
  fillSetups(raw, context, scratch, block.setup);
}

/** constant + sum of scale x stored, in float64. */
export function fillSum(raw: RawRows, sum: Sum, out: Float64Array): void {
  const { view, rows, stride } = raw;
  const { constant, terms } = sum;
  const { offset, scale, bitpix } = terms[0]!;
  if (bitpix === -32) {
    for (let row = 0; row < rows; row++) {
      out[row] = constant + scale * view.getFloat32(row * stride + offset);
    }
  } else {
    for (let row = 0; row < rows; row++) {
      out[row] = constant + scale * readStored(view, bitpix, row * stride + offset);
    }
  }
  for (let k = 1; k < terms.length; k++) {
    const term = terms[k]!;
    for (let row = 0; row < rows; row++) {
      out[row]! += term.scale * readStored(view, term.bitpix, row * stride + term.offset);
    }
  }
}

/** Zero and less is "not given", not a length of time. */
function fillIntegrations(raw: RawRows, sum: Sum, scratch: Float64Array, out: Float32Array): void {
  fillSum(raw, sum, scratch);
  for (let row = 0; row < raw.rows; row++) out[row] = scratch[row]! > 0 ? scratch[row]! : Number.NaN;
}

/**
 * Whole days and fractions of a day come in any order: summed with the lost digits carried along (Neumaier 1974,
 * ZAMM 54, 39), so that the fraction keeps its precision beside a Julian date.
 */
function fillTimes(raw: RawRows, context: RowContext, scratch: Float64Array, block: SampleBlock): void {
  const { view, rows, stride } = raw;
  const { constant, terms } = context.columns.time;
  const { timeOffset } = context;
  const { time, subarray } = block;
  const lost = scratch;
  time.fill(constant, 0, rows);
  lost.fill(0, 0, rows);
  for (let k = 0; k < terms.length; k++) {
    const { offset, scale, bitpix } = terms[k]!;
    const isFloat = bitpix === -32;
    for (let row = 0; row < rows; row++) {
      const at = row * stride + offset;
      const value = scale * (isFloat ? view.getFloat32(at) : readStored(view, bitpix, at));
      const sum = time[row]!;
      const next = sum + value;
      lost[row]! += Math.abs(sum) >= Math.abs(value) ? sum - next + value : value - next + sum;
      time[row] = next;
    }
  }
  for (let row = 0; row < rows; row++) {
    const array = subarray[row]!;
    const mjd = time[row]! + (lost[row]! - (array < timeOffset.length ? timeOffset[array]! : timeOffset[0]!));
    time[row] = Number.isFinite(mjd) ? mjd : Number.NaN;
  }
}

function fillAntennas(raw: RawRows, context: RowContext, scratch: Float64Array, block: SampleBlock): void {
  const { columns, words } = context;
  if (columns.baseline !== undefined) fillCodes(raw, context, scratch, block);
  else {
    fillNumbers(raw, words, columns.antenna1!, scratch, "ANTENNA1", MOST_ANTENNA, block.antenna1);
    fillNumbers(raw, words, columns.antenna2!, scratch, "ANTENNA2", MOST_ANTENNA, block.antenna2);
    block.subarray.fill(1, 0, raw.rows);
  }
  if (columns.subarray === undefined) return;
  fillNumbers(raw, words, columns.subarray, scratch, words.subarray, 9999, block.subarray);
  const { subarray } = block;
  // Zero is "not said": the first.
  for (let row = 0; row < raw.rows; row++) if (subarray[row] === 0) subarray[row] = 1;
}

function fillCodes(raw: RawRows, context: RowContext, scratch: Float64Array, block: SampleBlock): void {
  const { antenna1, antenna2, subarray } = block;
  const code: BaselineCode = { antenna1: 0, antenna2: 0, subarray: 1 };
  fillSum(raw, context.columns.baseline!, scratch);
  for (let row = 0; row < raw.rows; row++) {
    if (!decodeBaseline(scratch[row]!, code)) {
      throw badRow(
        raw,
        context.words,
        row,
        `BASELINE is ${scratch[row]}`,
        "256 x antenna 1 + antenna 2, or 65536 + 2048 x antenna 1 + antenna 2",
      );
    }
    antenna1[row] = code.antenna1;
    antenna2[row] = code.antenna2;
    subarray[row] = code.subarray;
  }
}

/** Whole numbers from 0 to `most`; a stored 1.0001 is 1. */
function fillNumbers(
  raw: RawRows,
  words: Words,
  sum: Sum,
  scratch: Float64Array,
  name: string,
  most: number,
  out: Int32Array,
): void {
  fillSum(raw, sum, scratch);
  for (let row = 0; row < raw.rows; row++) {
    const value = Math.round(scratch[row]!);
    if (!(value >= 0 && value <= most)) {
      throw badRow(raw, words, row, `${name} is ${scratch[row]}`, `a whole number from 0 to ${most}`);
    }
    out[row] = value;
  }
}

function fillFields(raw: RawRows, context: RowContext, scratch: Float64Array, out: Int32Array): void {
  const { columns, words } = context;
  if (columns.source === undefined) out.fill(context.onlyField, 0, raw.rows);
  else fillNumbers(raw, words, columns.source, scratch, words.source, 2 ** 31 - 1, out);
}

function fillSetups(raw: RawRows, context: RowContext, scratch: Float64Array, out: Int32Array): void {
  const { columns, words, setupIndex, fallbackSetup, strangeSetups } = context;
  if (columns.setup === undefined) {
    out.fill(setupIndex.get(1) ?? 0, 0, raw.rows);
    return;
  }
  fillSum(raw, columns.setup, scratch);
  for (let row = 0; row < raw.rows; row++) {
    const id = Math.round(scratch[row]!);
    let index = setupIndex.get(id);
    if (index === undefined) {
      index = fallbackSetup;
      if (index === undefined) {
        const known = [...setupIndex.keys()].slice(0, 20).join(", ");
        const expected = `one of the ${words.setupTable}: ${known}`;
        throw badRow(raw, words, row, `${words.setup} is ${scratch[row]}`, expected);
      }
      if (strangeSetups.size < MOST_STRANGE) strangeSetups.add(id);
    }
    out[row] = index;
  }
}

function badRow(raw: RawRows, words: Words, row: number, found: string, expected: string): InputError {
  return new InputError(
    `${words.row} ${raw.firstRow + row + 1}: ${found}: expected ${expected}`,
    { ...raw.place, byte: raw.byte + row * raw.rowBytes },
    "The data are damaged there",
  );
}
