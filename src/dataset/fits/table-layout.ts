/**
 * What the header says of a binary table: columns, their places in a row, the heap.
 * BINTABLE and its prototype A3DTABLE alike. FITS Standard 4.0, section 7.3.
 */
import { nearest } from "../../util/errors.ts";
import type { Hdu } from "./hdus.ts";
import type { Header } from "./header.ts";

/** L logical, X bit, B u8, I i16, J i32, K i64, A character, E f32, D f64, C and M pairs of E and D. */
export type ElementCode = "L" | "X" | "B" | "I" | "J" | "K" | "A" | "E" | "D" | "C" | "M";

export interface Column {
  /** from 1 */
  readonly index: number;
  /** as written, without padding; hostile text */
  readonly name: string;
  readonly unit: string;
  /** of the elements; of those in the heap when `variable` is set */
  readonly code: ElementCode;
  /** elements in a cell (descriptors when `variable` is set); 0 is legal */
  readonly repeat: number;
  /** descriptors of 32 or 64 bits point to elements in the heap */
  readonly variable: "P" | "Q" | undefined;
  /** from the start of the row */
  readonly offset: number;
  /** of the cell in the row */
  readonly bytes: number;
  /** physical = zero + scale x stored */
  readonly scale: number;
  readonly zero: number;
  /** the stored integer that means undefined */
  readonly nullValue: number | undefined;
  /** TDIMn, first axis fastest; [repeat] without one */
  readonly shape: readonly number[];
}

export interface TableLayout {
  readonly hdu: Hdu;
  readonly rowBytes: number;
  readonly rows: number;
  readonly columns: readonly Column[];
  /** byte of the heap in the file, and its size */
  readonly heapStart: number;
  readonly heapBytes: number;
}

export const ELEMENT_BYTES: Readonly<Record<ElementCode, number>> = {
  L: 1,
  X: 1 / 8,
  B: 1,
  I: 2,
  J: 4,
  K: 8,
  A: 1,
  E: 4,
  D: 8,
  C: 8,
  M: 16,
};

/** @throws InputError when the columns do not make up the row, or a form is no form */
export function tableLayout(hdu: Hdu): TableLayout {
  const { header } = hdu;
  if (header.requiredInteger("NAXIS", 0) !== 2) {
    throw header.error(`NAXIS is ${header.shown("NAXIS")}: expected 2 in a binary table`, "NAXIS");
  }
  const rowBytes = header.requiredInteger("NAXIS1", 0);
  const rows = header.requiredInteger("NAXIS2", 0);
  const fields = header.requiredInteger("TFIELDS", 0, 999);
  const columns: Column[] = [];
  let offset = 0;
  for (let index = 1; index <= fields; index++) {
    const column = readColumn(header, index, offset);
    offset += column.bytes;
    columns.push(column);
  }
  if (offset !== rowBytes) {
    throw header.error(
      `the ${fields} columns take ${offset} bytes a row, NAXIS1 says ${rowBytes}: expected the same`,
      "NAXIS1",
    );
  }
  const tableBytes = rowBytes * rows;
  const gap = header.integer("THEAP", 0) ?? tableBytes;
  if (gap < tableBytes || gap > hdu.dataBytes) {
    throw header.error(
      `THEAP is ${gap}: expected the heap between byte ${tableBytes} of the data, where the rows end, and their end at ` +
        `${hdu.dataBytes}`,
      "THEAP",
    );
  }
  return {
    hdu,
    rowBytes,
    rows,
    columns,
    heapStart: hdu.dataStart + gap,
    heapBytes: hdu.dataBytes - gap,
  };
}

const FORM = /^(\d*)(?:([LXBIJKAEDCM])|([PQ])([LXBIJKAEDCM])).*$/;

function readColumn(header: Header, index: number, offset: number): Column {
  const formKey = `TFORM${index}`;
  const form = header.text(formKey)?.trim().toUpperCase();
  const match = form === undefined ? null : FORM.exec(form);
  if (match === null) {
    throw header.error(
      `${formKey} is ${form ?? "missing"}: expected a repeat count and one of L X B I J K A E D C M P Q`,
      formKey,
    );
  }
  const repeat = match[1] === "" ? 1 : Number(match[1]);
  const code = (match[2] ?? match[4]) as ElementCode;
  const variable = match[3] as "P" | "Q" | undefined;
  const bytes = variable === undefined ? cellBytes(code, repeat) : repeat * (variable === "P" ? 8 : 16);
  if (!Number.isSafeInteger(bytes)) {
    throw header.error(`${formKey} is ${form}: expected a cell that a file can hold`, formKey);
  }
  if (variable !== undefined && repeat > 1) {
    throw header.error(`${formKey} is ${form}: expected at most one array a cell`, formKey);
  }
  return {
    index,
    name: (header.shown(`TTYPE${index}`) ?? "").trim(),
    unit: (header.shown(`TUNIT${index}`) ?? "").trim(),
    code,
    repeat,
    variable,
    offset,
    bytes,
    scale: header.number(`TSCAL${index}`) ?? 1,
    zero: header.number(`TZERO${index}`) ?? 0,
    nullValue: header.number(`TNULL${index}`),
    shape: shapeOf(header, index, repeat, variable !== undefined),
  };
}

/** Bytes of `count` elements; bits fill whole bytes. */
export function cellBytes(code: ElementCode, count: number): number {
  return Math.ceil(count * ELEMENT_BYTES[code]);
}

/** A TDIMn that makes no sense is passed over: the cell itself can be read without it. */
function shapeOf(header: Header, index: number, repeat: number, variable: boolean): number[] {
  const text = header.shown(`TDIM${index}`) ?? "";
  const match = /^\s*\(\s*(\d+(?:\s*,\s*\d+)*)\s*\)\s*$/.exec(text);
  if (match === null) return [repeat];
  const shape = match[1]!.split(",").map(Number);
  const elements = shape.reduce((product, length) => product * length, 1);
  // A shape of fewer elements than the cell holds is legal (section 7.3.2); of more is not.
  return variable || elements <= repeat ? shape : [repeat];
}

/** Names compare without case and padding. The first of `names` that the table has. */
export function findColumn(layout: TableLayout, ...names: string[]): Column | undefined {
  for (const name of names) {
    const found = layout.columns.find((column) => column.name.toUpperCase() === name.toUpperCase());
    if (found !== undefined) return found;
  }
  return undefined;
}

/** @throws InputError when the table has none of `names` */
export function requireColumn(layout: TableLayout, ...names: string[]): Column {
  const column = findColumn(layout, ...names);
  if (column !== undefined) return column;
  const near = nearest(
    names[0]!,
    layout.columns.map(({ name }) => name),
  );
  throw layout.hdu.header.error(
    `no column ${names.join(" or ")}${near === undefined ? "" : ` (is it the one called "${near}"?)`}`,
  );
}
