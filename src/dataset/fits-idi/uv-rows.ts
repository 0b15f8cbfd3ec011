/** The rows of the UV_DATA tables of a file, and where the elements of their matrices lie. */
import type { BlockRequest, Field, SampleBlock, Setup, Shape } from "../dataset.ts";
import type { ByteSource } from "../fits/byte-source.ts";
import { type RowReader, readBlocks } from "../fits-rows/blocks.ts";
import { requestedRows } from "../fits-rows/plan.ts";
import type { RowContext } from "../fits-rows/rows.ts";
import type { SampleLayout } from "../fits-rows/samples.ts";
import { type AntennaTable, timeOffsets } from "../fits-tables/antenna-table.ts";
import type { Notes } from "../notes.ts";
import type { TableFlags } from "../table-flags.ts";
import { uvColumns } from "./uv-columns.ts";
import type { UvLayout } from "./uv-layout.ts";
import { WORDS } from "./words.ts";

/** What the small tables say of the rows. */
export interface TablesRead {
  readonly antennas: readonly AntennaTable[];
  /** CRVAL of the FREQ axis, or what stands in for it, Hz */
  readonly reference: number;
  readonly setups: readonly Setup[];
  readonly fields: readonly Field[] | undefined;
  readonly flags: TableFlags | undefined;
}

/** One UV_DATA table. */
export interface UvTable extends RowReader {
  readonly hasWeights: boolean;
  /** index in the dataset of its first row */
  readonly firstRow: number;
}

export function uvTables(
  source: ByteSource,
  layouts: readonly UvLayout[],
  tables: TablesRead,
  notes: Notes,
): UvTable[] {
  const { setups, fields, antennas } = tables;
  const common: Omit<RowContext, "columns"> = {
    words: WORDS,
    setupIndex: new Map(setups.map(({ id }, index) => [id, index])),
    fallbackSetup: setups.length === 1 ? 0 : undefined,
    strangeSetups: new Set(),
    // A table of one source names the field of rows that do not.
    onlyField: fields?.length === 1 ? fields[0]!.id : 1,
    timeOffset: timeOffsets(antennas),
  };
  let firstRow = 0;
  return layouts.map((layout) => {
    const { hdu, table } = layout;
    const { columns, weights, hasWeights, needs } = uvColumns(
      layout,
      tables.reference,
      antennas[0]?.referenceDay ?? null,
      notes,
    );
    const reader: UvTable = {
      source,
      store: {
        place: hdu.header.place,
        word: WORDS.row,
        start: hdu.dataStart,
        rows: table.rows,
        rowBytes: table.rowBytes,
        needs,
      },
      samples: sampleLayout(layout),
      context: { ...common, columns },
      weights,
      flags: tables.flags,
      hasWeights,
      firstRow,
    };
    firstRow += table.rows;
    return reader;
  });
}

export function shapeOf({ subband, frequency, stokes }: UvLayout): Shape {
  return { subbands: subband.length, channels: frequency.length, polarizations: stokes.length };
}

export function sampleLayout(layout: UvLayout): SampleLayout {
  const { flux, bitpix, table, complex, stokes, frequency, subband } = layout;
  const itemBytes = Math.abs(bitpix) / 8;
  return {
    bitpix,
    rowBytes: table.rowBytes,
    start: flux.offset,
    shape: shapeOf(layout),
    subbandStep: subband.stride * itemBytes,
    channelStep: frequency.stride * itemBytes,
    polarizationStep: stokes.stride * itemBytes,
    complexStep: complex.stride * itemBytes,
    hasWeight: complex.length === 3,
    scale: flux.scale,
    zero: flux.zero,
    // Only integers have one (FITS Standard 4.0, section 7.3.2).
    blank: bitpix > 0 ? flux.nullValue : undefined,
  };
}

/** Table after table; a block never reaches over the end of one. */
export async function* blocksOf(
  tables: readonly UvTable[],
  request: BlockRequest,
): AsyncGenerator<SampleBlock> {
  const total = tables.reduce((sum, { store }) => sum + store.rows, 0);
  const [first, end] = requestedRows(total, request);
  for (const table of tables) {
    const { rows } = table.store;
    const from = Math.max(first - table.firstRow, 0);
    const to = Math.min(end - table.firstRow, rows);
    if (from >= to) continue;
    for await (const block of readBlocks(table, { ...request, rows: [from, to] })) {
      block.firstRow += table.firstRow;
      yield block;
    }
  }
}
