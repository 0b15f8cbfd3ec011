/** A copy of a FITS-IDI file with the weights of selected samples turned negative, in the matrix or in WEIGHT. */
import type { ByteSink } from "../../util/byte-sink.ts";
import { CannotHoldFlags } from "../cannot-hold.ts";
import { copyBytes } from "../fits/copy.ts";
import type { FitsFile } from "../fits/hdus.ts";
import { type Column, ELEMENT_BYTES, findColumn } from "../fits/table-layout.ts";
import { copyFlippedRows } from "../fits-rows/copy-flipped.ts";
import { type FlipRow, sampleFlipper, slotFlipper } from "../fits-rows/flip-weights.ts";
import { Notes } from "../notes.ts";
import type { RowsOfFile } from "../rows-of-file.ts";
import { compileSelections } from "../selection-matcher.ts";
import { readUvLayouts } from "./data-tables.ts";

import { bitpixOfCode, holdsNumbers } from "./stored-columns.ts";
import { findTables } from "./tables.ts";
import type { UvLayout } from "./uv-layout.ts";
import { sampleLayout } from "./uv-rows.ts";

/** @throws CannotHoldFlags where the weights cannot say what is selected */
export async function copyFlaggingIdiWeights(
  file: FitsFile,
  rows: RowsOfFile,
  sink: ByteSink,
): Promise<void> {
  const layouts = await readUvLayouts(file.source, findTables(file, new Notes()).data, new Notes());
  const matcher = compileSelections(rows.dataset, rows.selections);
  const cursor = await file.source.cursor();
  let { firstRow } = rows;
  let copied = 0;
  try {
    for (const layout of layouts) {
      const stored = {
        start: layout.hdu.dataStart,
        rows: layout.table.rows,
        rowBytes: layout.table.rowBytes,
      };
      await copyBytes(cursor, sink, copied, stored.start);
      await copyFlippedRows(
        cursor,
        sink,
        stored,
        { dataset: rows.dataset, firstRow },
        matcher,
        flipperOf(layout),
      );
      copied = stored.start + stored.rows * stored.rowBytes;
      firstRow += stored.rows;
    }
    await copyBytes(cursor, sink, copied, Number.POSITIVE_INFINITY);
  } finally {
    await cursor.close();
  }
}

function flipperOf(layout: UvLayout): FlipRow {
  if (layout.complex.length === 3) return sampleFlipper(sampleLayout(layout));
  const column = findColumn(layout.table, "WEIGHT");
  if (column === undefined || !holdsNumbers(column)) throw new CannotHoldFlags("the file carries no weights");
  const bitpix = bitpixOfCode(column.code)!;
  const { scale, zero, nullValue } = column;
  const stored = { bitpix, scale, zero, blank: bitpix > 0 ? nullValue : undefined };
  return slotFlipper(stored, slotsOf(layout, column), offsetsOf(column), coversOf(layout, column));
}

function offsetsOf({ offset, repeat, code }: Column): number[] {
  return Array.from({ length: repeat }, (_, k) => offset + k * ELEMENT_BYTES[code]);
}

/** One weight a product and sub-band (product fastest), one a sub-band, or one a row. */
function slotsOf({ stokes, subband, frequency }: UvLayout, { repeat }: Column): Int32Array {
  const [products, subbands, channels] = [stokes.length, subband.length, frequency.length];
  const slots = new Int32Array(subbands * channels * products);
  let i = 0;
  for (let band = 0; band < subbands; band++) {
    for (let channel = 0; channel < channels; channel++) {
      for (let product = 0; product < products; product++) {
        if (repeat === products * subbands) slots[i] = band * products + product;
        else if (repeat === subbands) slots[i] = band;
        i++;
      }
    }
  }
  return slots;
}

function coversOf({ stokes, subband }: UvLayout, { repeat }: Column): string {
  if (repeat === stokes.length * subband.length) return "all channels of a sub-band and product";
  return repeat === subband.length ? "a whole sub-band" : "a whole row";
}
