/**
 * Binary tables as FITS wants them written, built in memory: the small tables of a dataset.
 * FITS Standard 4.0, section 7.3.
 */
import { ascii, type CardToWrite, card, headerBlocks, padding, type Real } from "./write-header.ts";

/** A cell: text for A, numbers (or bigints for K), booleans for L and X; C and M as re, im, re, im ... */
export type CellToWrite =
  | string
  | number
  | bigint
  | boolean
  | null
  | ArrayLike<number | bigint | boolean | null>;

export interface ColumnToWrite {
  readonly name: string;
  /** TFORM: repeat and code, such as 8A, 3D, 0D, 1PE; P and Q cells go to the heap, their maximum is filled in */
  readonly form: string;
  readonly unit?: string;
  /** one a row, as stored (before TSCAL and TZERO) */
  readonly cells: readonly CellToWrite[];
  /** TSCALn, TZEROn, TNULLn, TDIMn, TDISPn by their first word */
  readonly keywords?: Readonly<Record<string, string | number | Real>>;
}

export interface TableToWrite {
  readonly name: string;
  /** EXTVER, default 1 */
  readonly version?: number;
  readonly cards?: readonly CardToWrite[];
  readonly columns: readonly ColumnToWrite[];
}

/** A table whose rows are written one by one, after the header. */
export interface TableToStream extends Omit<TableToWrite, "columns"> {
  readonly columns: readonly Omit<ColumnToWrite, "cells">[];
  readonly rows: number;
}

/** The header of a table of `rows` rows, and the bytes of a row. Columns of fixed width only. */
export function streamedTable(table: TableToStream): { header: Uint8Array; rowBytes: number } {
  const rowBytes = table.columns.reduce((sum, { name, form }) => sum + fixedBytes(name, form), 0);
  const header = tableHeader(table, table.columns, { width: rowBytes, rows: table.rows, heapBytes: 0 });
  return { header, rowBytes };
}

function fixedBytes(name: string, form: string): number {
  const match = /^(\d*)([LXBIJKAEDCM])$/.exec(form);
  if (match === null) throw new RangeError(`column ${name}: form "${form}" has no fixed width`);
  return cellBytes(match[2]!, match[1] === "" ? 1 : Number(match[1]));
}

interface Packed {
  readonly column: ColumnToWrite;
  readonly code: string;
  /** TFORM as written */
  readonly form: string;
  /** one a row */
  readonly bytes: readonly Uint8Array[];
  readonly width: number;
}

/**
 * A whole BINTABLE extension, header and padded data. Meant for the small tables of a dataset: it is built in memory.
 *
 * @throws RangeError when a cell does not fit its form (a defect of the caller)
 */
export function binaryTable(table: TableToWrite): Uint8Array {
  const rows = table.columns[0]?.cells.length ?? 0;
  const heap: Uint8Array[] = [];
  const packed = table.columns.map((column) => {
    if (column.cells.length !== rows) {
      throw new RangeError(`column ${column.name} holds ${column.cells.length} rows, expected ${rows}`);
    }
    return packColumn(column, heap);
  });
  const width = packed.reduce((sum, { width: bytes }) => sum + bytes, 0);
  const heapBytes = heap.reduce((sum, part) => sum + part.length, 0);
  const forms = packed.map(({ column, form }) => ({ ...column, form }));
  const header = tableHeader(table, forms, { width, rows, heapBytes });
  const dataBytes = width * rows + heapBytes;
  const out = new Uint8Array(header.length + dataBytes + padding(dataBytes));
  out.set(header);
  let at = header.length;
  for (let row = 0; row < rows; row++) {
    for (const { bytes } of packed) {
      out.set(bytes[row]!, at);
      at += bytes[row]!.length;
    }
  }
  for (const part of heap) {
    out.set(part, at);
    at += part.length;
  }
  return out;
}

function tableHeader(
  table: Omit<TableToWrite, "columns">,
  columns: readonly Omit<ColumnToWrite, "cells">[],
  size: { width: number; rows: number; heapBytes: number },
): Uint8Array {
  const cards: CardToWrite[] = [
    card("XTENSION", "BINTABLE", "binary table"),
    card("BITPIX", 8),
    card("NAXIS", 2),
    card("NAXIS1", size.width, "bytes a row"),
    card("NAXIS2", size.rows, "rows"),
    card("PCOUNT", size.heapBytes),
    card("GCOUNT", 1),
    card("TFIELDS", columns.length),
    card("EXTNAME", table.name),
    card("EXTVER", table.version ?? 1),
  ];
  columns.forEach((column, i) => {
    const n = i + 1;
    cards.push(card(`TTYPE${n}`, column.name), card(`TFORM${n}`, column.form));
    if (column.unit !== undefined) cards.push(card(`TUNIT${n}`, column.unit));
    for (const [word, value] of Object.entries(column.keywords ?? {})) cards.push(card(`${word}${n}`, value));
  });
  cards.push(...(table.cards ?? []));
  return headerBlocks(cards);
}

const ELEMENT_BYTES: Readonly<Record<string, number>> = {
  L: 1,
  B: 1,
  A: 1,
  I: 2,
  J: 4,
  E: 4,
  K: 8,
  D: 8,
  C: 8,
  M: 16,
};

function packColumn(column: ColumnToWrite, heap: Uint8Array[]): Packed {
  const match = /^(\d*)([LXBIJKAEDCM]|[PQ]([LXBIJKAEDCM]))/.exec(column.form);
  if (match === null) throw new RangeError(`column ${column.name}: form "${column.form}" is unknown`);
  const repeat = match[1] === "" ? 1 : Number(match[1]);
  const code = match[2]![0]!;
  if (code === "P" || code === "Q") return packVariable(column, code, repeat, match[3]!, heap);
  const bytes = column.cells.map((cell) => packCell(column.name, code, repeat, cell));
  return { column, code, form: column.form, bytes, width: cellBytes(code, repeat) };
}

function cellBytes(code: string, repeat: number): number {
  return code === "X" ? Math.ceil(repeat / 8) : repeat * ELEMENT_BYTES[code]!;
}

/** Each cell's elements go to the heap one after another; the row keeps their count and offset. */
function packVariable(
  column: ColumnToWrite,
  code: "P" | "Q",
  repeat: number,
  element: string,
  heap: Uint8Array[],
): Packed {
  let heapBytes = heap.reduce((sum, part) => sum + part.length, 0);
  let most = 0;
  const width = code === "P" ? 8 : 16;
  const bytes = column.cells.map((cell) => {
    const count = repeat === 0 ? 0 : elementCount(element, cell);
    const part = packCell(column.name, element, count, cell);
    most = Math.max(most, count);
    const descriptor = new DataView(new ArrayBuffer(repeat === 0 ? 0 : width));
    if (repeat !== 0) {
      heap.push(part);
      if (code === "P") {
        descriptor.setInt32(0, count);
        descriptor.setInt32(4, heapBytes);
      } else {
        descriptor.setBigInt64(0, BigInt(count));
        descriptor.setBigInt64(8, BigInt(heapBytes));
      }
      heapBytes += part.length;
    }
    return new Uint8Array(descriptor.buffer);
  });
  return { column, code, form: `${repeat}${code}${element}(${most})`, bytes, width: repeat * width };
}

function elementCount(code: string, cell: CellToWrite): number {
  if (cell === null || typeof cell !== "object") return typeof cell === "string" ? cell.length : 1;
  return code === "C" || code === "M" ? cell.length / 2 : cell.length;
}

function packCell(name: string, code: string, repeat: number, cell: CellToWrite): Uint8Array {
  const out = new Uint8Array(cellBytes(code, repeat));
  if (code === "A") {
    const text = ascii(String(cell ?? ""));
    if (text.length > repeat) throw new RangeError(`column ${name}: "${text}" is longer than ${repeat}`);
    for (let i = 0; i < repeat; i++) out[i] = i < text.length ? text.charCodeAt(i) : 0x20;
    return out;
  }
  const items = cell !== null && typeof cell === "object" ? Array.from(cell) : [cell];
  const expected = code === "C" || code === "M" ? 2 * repeat : repeat;
  if (repeat > 0 && items.length !== expected) {
    throw new RangeError(`column ${name}: a cell holds ${items.length} values, expected ${expected}`);
  }
  const view = new DataView(out.buffer);
  for (let i = 0; i < expected; i++)
    putItem(view, code, i, items[i] as number | bigint | boolean | string | null);
  return out;
}

function putItem(
  view: DataView,
  code: string,
  i: number,
  item: number | bigint | boolean | string | null,
): void {
  switch (code) {
    case "L":
      view.setUint8(i, item === null ? 0 : item ? 0x54 : 0x46);
      return;
    case "X":
      if (item) view.setUint8(i >> 3, view.getUint8(i >> 3) | (0x80 >> (i & 7)));
      return;
    case "K":
      view.setBigInt64(i * 8, BigInt(item ?? 0));
      return;
    case "B":
      view.setUint8(i, Number(item));
      return;
    case "I":
      view.setInt16(i * 2, Number(item));
      return;
    case "J":
      view.setInt32(i * 4, Number(item));
      return;
    case "E":
    case "C":
      view.setFloat32(i * 4, Number(item));
      return;
    default:
      view.setFloat64(i * 8, Number(item));
  }
}
