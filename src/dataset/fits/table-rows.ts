/**
 * Cells of a binary table that is small enough to hold: the tables around the visibilities.
 * Numbers come scaled (TSCALn, TZEROn); TNULLn becomes NaN. FITS Standard 4.0, section 7.3.3.
 */
import { InputError } from "../../util/errors.ts";
import type { Cursor } from "./byte-source.ts";
import { type Column, cellBytes, type ElementCode, type TableLayout } from "./table-layout.ts";

/** Largest table held, bytes of rows and heap. Antennas, fields and frequencies take kilobytes. */
export const MOST_TABLE_BYTES = 64 * 1024 * 1024;

/** @throws InputError when the table is larger than `mostBytes` */
export async function readTable(
  cursor: Cursor,
  layout: TableLayout,
  mostBytes = MOST_TABLE_BYTES,
): Promise<Table> {
  const { hdu } = layout;
  if (hdu.dataBytes > mostBytes) {
    throw hdu.header.error(
      `the table has ${layout.rows} rows, ${hdu.dataBytes} bytes: expected at most ${mostBytes} in a table of this kind`,
      "NAXIS2",
    );
  }
  if (hdu.held !== undefined) return new Table(layout, hdu.held);
  const bytes = new Uint8Array(hdu.dataBytes);
  const got = await cursor.read(bytes, hdu.dataStart);
  if (got < bytes.length) {
    throw hdu.header.error(
      `the file now ends at byte ${hdu.dataStart + got}: expected ${bytes.length} bytes of table`,
    );
  }
  return new Table(layout, bytes);
}

/** A run of elements: bytes and how many. */
interface Run {
  readonly at: number;
  readonly count: number;
}

export class Table {
  readonly layout: TableLayout;
  readonly rows: number;
  readonly #view: DataView;

  constructor(layout: TableLayout, bytes: Uint8Array) {
    this.layout = layout;
    this.rows = layout.rows;
    this.#view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  }

  /** Elements in a cell: the repeat count, or the length of a variable array. */
  count(row: number, column: Column): number {
    return this.#run(row, column).count;
  }

  /**
   * The numbers of a cell; pairs (re, im) of C and M one after the other. Integers beyond 2^53 lose their last digits:
   * `integers` keeps them. Logicals, bits and characters have no numbers: NaN.
   */
  numbers(row: number, column: Column): Float64Array {
    const { at, count } = this.#run(row, column);
    const pairs = column.code === "C" || column.code === "M";
    const values = new Float64Array(pairs ? 2 * count : count);
    for (let k = 0; k < values.length; k++) {
      const stored = storedNumber(this.#view, column.code, at, k);
      if (stored === column.nullValue && isInteger(column.code)) values[k] = Number.NaN;
      // The zero belongs to the real part of a pair alone (section 7.3.2).
      else values[k] = (pairs && k % 2 === 1 ? 0 : column.zero) + column.scale * stored;
    }
    return values;
  }

  /** Element `k` of a cell as a number; NaN where the cell has none. */
  number(row: number, column: Column, k = 0): number {
    const { at, count } = this.#run(row, column);
    if (k >= count) return Number.NaN;
    const stored = storedNumber(this.#view, column.code, at, k);
    if (stored === column.nullValue && isInteger(column.code)) return Number.NaN;
    return column.zero + column.scale * stored;
  }

  /** Exact integers of a B, I, J or K cell: TZERO (the unsigned convention) applied, TSCAL must be 1. */
  integers(row: number, column: Column): bigint[] {
    if (!isInteger(column.code) || column.scale !== 1 || !Number.isInteger(column.zero)) {
      throw new RangeError(`column ${column.name} does not hold whole numbers`);
    }
    const { at, count } = this.#run(row, column);
    const zero = BigInt(column.zero);
    return Array.from({ length: count }, (_, k) => {
      if (column.code === "K") return zero + this.#view.getBigInt64(at + 8 * k);
      return zero + BigInt(storedNumber(this.#view, column.code, at, k));
    });
  }

  /** The text of an A cell up to the first NUL, without trailing blanks. Hostile. Other columns: "". */
  text(row: number, column: Column): string {
    if (column.code !== "A") return "";
    const { at, count } = this.#run(row, column);
    const bytes = Buffer.from(this.#view.buffer, this.#view.byteOffset + at, count);
    const text = bytes.toString("latin1");
    const end = text.indexOf("\0");
    return (end === -1 ? text : text.slice(0, end)).trimEnd();
  }

  /** L elements: true, false, or null where undefined. */
  logicals(row: number, column: Column): (boolean | null)[] {
    if (column.code !== "L") return [];
    const { at, count } = this.#run(row, column);
    return Array.from({ length: count }, (_, k) => {
      const byte = this.#view.getUint8(at + k);
      return byte === 0x54 ? true : byte === 0x46 ? false : null;
    });
  }

  /** X elements, most significant bit first. */
  bits(row: number, column: Column): boolean[] {
    if (column.code !== "X") return [];
    const { at, count } = this.#run(row, column);
    return Array.from(
      { length: count },
      (_, k) => (this.#view.getUint8(at + (k >> 3)) & (0x80 >> (k & 7))) !== 0,
    );
  }

  #run(row: number, column: Column): Run {
    if (!(row >= 0 && row < this.rows)) throw new RangeError(`row ${row} of ${this.rows}`);
    const at = row * this.layout.rowBytes + column.offset;
    if (column.variable === undefined || column.repeat === 0) return { at, count: column.repeat };
    return this.#heapRun(row, column, at);
  }

  /** @throws InputError when the descriptor points outside the heap */
  #heapRun(row: number, column: Column, at: number): Run {
    const view = this.#view;
    const wide = column.variable === "Q";
    const count = wide ? Number(view.getBigInt64(at)) : view.getInt32(at);
    const offset = wide ? Number(view.getBigInt64(at + 8)) : view.getInt32(at + 4);
    const { hdu, heapStart, heapBytes } = this.layout;
    // An empty array's offset means nothing.
    if (count === 0) return { at, count: 0 };
    if (!(count > 0 && offset >= 0 && offset + cellBytes(column.code, count) <= heapBytes)) {
      throw new InputError(
        `column ${column.name} points to ${count} elements at byte ${offset} of the heap: expected them within its ` +
          `${heapBytes} bytes`,
        { ...hdu.header.place, byte: hdu.dataStart + at, row: row + 1 },
      );
    }
    return { at: heapStart - hdu.dataStart + offset, count };
  }
}

function isInteger(code: ElementCode): boolean {
  return code === "B" || code === "I" || code === "J" || code === "K";
}

/** Element `k`, counting the two of a pair each, of a run at byte `at`. */
function storedNumber(view: DataView, code: ElementCode, at: number, k: number): number {
  switch (code) {
    case "B":
      return view.getUint8(at + k);
    case "I":
      return view.getInt16(at + 2 * k);
    case "J":
      return view.getInt32(at + 4 * k);
    case "K":
      return Number(view.getBigInt64(at + 8 * k));
    case "E":
    case "C":
      return view.getFloat32(at + 4 * k);
    case "D":
    case "M":
      return view.getFloat64(at + 8 * k);
    default:
      return Number.NaN;
  }
}
