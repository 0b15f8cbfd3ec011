/** Columns of numbers as the rows of a table store them. */
import { type Column, ELEMENT_BYTES, type ElementCode } from "../fits/table-layout.ts";
import type { Sum } from "../fits-rows/columns.ts";
import type { Piece } from "../fits-rows/plan.ts";

const BITPIX: Readonly<Partial<Record<ElementCode, number>>> = { B: 8, I: 16, J: 32, K: 64, E: -32, D: -64 };

/** Item type of a column's elements; undefined where they are no plain numbers. */
export function bitpixOfCode(code: ElementCode): number | undefined {
  return BITPIX[code];
}

/** Whether each row has an element of the column in the row itself. */
export function holdsNumbers({ code, repeat, variable }: Column): boolean {
  return BITPIX[code] !== undefined && repeat > 0 && variable === undefined;
}

/** Element `k` of a column, scaled; `start` is added. */
export function sumOf(column: Column, start = 0, k = 0): Sum {
  const { code, offset, scale, zero } = column;
  return {
    constant: start + zero,
    terms: [{ offset: offset + k * ELEMENT_BYTES[code], scale, bitpix: BITPIX[code]! }],
  };
}

export function pieceOf({ offset, bytes }: Column): Piece {
  return { offset, bytes };
}
