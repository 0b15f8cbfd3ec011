/** A FITS-IDI file as a Dataset: small tables first, then one pass over the rows, then what only both together tell. */
import type { BlockRequest, Field, SampleBlock, Setup, Shape } from "../dataset.ts";
import type { FitsFile } from "../fits/hdus.ts";
import { type RowReader, readBlocks } from "../fits-rows/blocks.ts";
import { requestedRows } from "../fits-rows/plan.ts";
import type { RowContext } from "../fits-rows/rows.ts";
import type { SampleLayout } from "../fits-rows/samples.ts";
import { type AntennaTable, readAntennaTable, timeOffsets } from "../fits-tables/antenna-table.ts";
import { arrayInfo } from "../fits-tables/array-info.ts";
import { fieldsOfRows, headerEquinox, noteImpossibleFields, readFieldTable } from "../fits-tables/fields.ts";
import { headerFacts, noteDates, polarizationsOf, telescopeOf, unitOf } from "../fits-tables/header-facts.ts";
import { noteRows } from "../fits-tables/note-rows.ts";
import { readSetups } from "../fits-tables/setups.ts";
import { distinctNumbers, withSubarrayNumbers } from "../fits-tables/subarray-numbers.ts";
import { datasetName } from "../name.ts";
import type { Notes } from "../notes.ts";
import { type OpenedDataset, type RowSummary, summarizeRows } from "../row-summary.ts";
import { TableFlags } from "../table-flags.ts";
import { numbersOf, readAntennaNumbers, withUnplaced } from "./antenna-numbers.ts";
import { readUvLayouts } from "./data-tables.ts";
import { noteDisagreements } from "./disagreements.ts";
import { readFlagTables } from "./flag-table.ts";
import { findTables, type TableHdus } from "./tables.ts";
import { uvColumns } from "./uv-columns.ts";
import type { UvLayout } from "./uv-layout.ts";
import { WORDS } from "./words.ts";

/**
 * @param known of the same file, from an earlier opening: saves the pass over the rows
 * @throws InputError where the file is malformed
 */
export async function openFitsIdi(file: FitsFile, known?: RowSummary): Promise<OpenedDataset> {
  const { notes, source } = file;
  const hdus = findTables(file, notes);
  const layouts = await readUvLayouts(source, hdus.data, notes);
  const [first] = layouts;
  const headers = [first.hdu.header, file.hdus[0].header];
  const polarizations = polarizationsOf(first.stokes, first.hdu.header);
  const shape = shapeOf(first);
  noteDisagreements([...smallTables(hdus), ...layouts.map(({ hdu }) => hdu)], first, notes);
  const tables = await readTables(file, hdus, first, shape, notes);
  const rowTables = readersOf(file, layouts, tables, notes);
  const { tables: antennas, numbers } = distinctNumbers(tables.antennas, notes);
  const blocks = withSubarrayNumbers((request: BlockRequest) => blocksOf(rowTables, request), numbers);
  const rows = rowTables.reduce((sum, { store }) => sum + store.rows, 0);
  const summary = known ?? (await summarizeRows({ rows, blocks }));
  const { context } = rowTables[0]!;
  noteRows(summary, hdus.frequencies === undefined ? new Set() : context.strangeSetups, WORDS, notes);
  noteDates(headers, summary, notes);
  noteWeights(first, notes);
  const centre = { header: first.hdu.header, ...first };
  const named = rowTables.every((table) => table.context.columns.source !== undefined);
  const fields = fieldsOfRows(centre, named, tables.fields, summary, WORDS, notes);
  noteImpossibleFields(fields, notes);
  const array = arrayInfo(antennas, fields, summary, telescopeOf(headers), WORDS, notes);
  return {
    name: datasetName(source.path),
    files: [source.path],
    bytes: source.bytesOnDisk,
    format: "fits-idi",
    header: headerFacts(headers),
    array,
    fields,
    setups: tables.setups,
    polarizations,
    shape,
    unit: unitOf(writtenUnit(first, file)),
    hasWeights: rowTables.every(({ hasWeights }) => hasWeights),
    rows,
    notes: notes.list(),
    summary,
    blocks,
  };
}

function shapeOf({ subband, frequency, stokes }: UvLayout): Shape {
  return { subbands: subband.length, channels: frequency.length, polarizations: stokes.length };
}

function smallTables({ geometries, antennas, frequencies, sources, flags }: TableHdus) {
  const single = [frequencies, sources].filter((hdu) => hdu !== undefined);
  return [...geometries, ...antennas, ...single, ...flags];
}

function writtenUnit({ flux, hdu }: UvLayout, file: FitsFile): string | undefined {
  if (flux.unit !== "") return flux.unit;
  return hdu.header.shown("BUNIT") ?? file.hdus[0].header.shown("BUNIT");
}

function noteWeights({ hdu }: UvLayout, notes: Notes): void {
  const kind = (hdu.header.shown("WEIGHTYP") ?? "").trim().toUpperCase();
  if (kind !== "CORRELAT") return;
  notes.note(
    "weights-are-fractions",
    "weights are shares of valid data (WEIGHTYP = CORRELAT), not inverse variances: noise is that measured in the samples",
  );
}

interface TablesRead {
  readonly antennas: readonly AntennaTable[];
  /** CRVAL of the FREQ axis, or what stands in for it, Hz */
  readonly reference: number;
  readonly setups: readonly Setup[];
  readonly fields: readonly Field[] | undefined;
  readonly flags: TableFlags | undefined;
}

async function readTables(
  file: FitsFile,
  hdus: TableHdus,
  layout: UvLayout,
  shape: Shape,
  notes: Notes,
): Promise<TablesRead> {
  const { header } = layout.hdu;
  const cursor = await file.source.cursor();
  try {
    const numbers = await readAntennaNumbers(cursor, hdus.antennas, notes);
    const antennas: AntennaTable[] = [];
    for (const hdu of hdus.geometries) {
      const table = await readAntennaTable(cursor, hdu, notes, numbersOf(numbers, hdu.version));
      antennas.push(withUnplaced(table, numbers, notes));
    }
    const reference = referenceFrequency(layout, hdus, antennas, notes);
    const spectrum = { header, ...layout };
    const setups = await readSetups(cursor, hdus.frequencies, spectrum, reference, WORDS, notes);
    const { sources } = hdus;
    const fields =
      sources === undefined ? undefined : await readFieldTable(cursor, sources, notes, headerEquinox(header));
    const flags = await readFlagTables(cursor, hdus.flags, { antennas, setups, shape }, notes);
    return {
      antennas,
      reference,
      setups,
      fields,
      flags: flags.length === 0 ? undefined : new TableFlags(flags),
    };
  } finally {
    await cursor.close();
  }
}

/** CRVAL of the FREQ axis; REF_FREQ or FREQ of another table where there is no such axis. */
function referenceFrequency(
  { frequency, hdu }: UvLayout,
  { frequencies }: TableHdus,
  antennas: readonly AntennaTable[],
  notes: Notes,
): number {
  if (Number.isFinite(frequency.value)) return frequency.value;
  const stated =
    hdu.header.looseNumber("REF_FREQ") ??
    frequencies?.header.looseNumber("REF_FREQ") ??
    antennas.find((table) => table.frequency !== null)?.frequency;
  if (stated === undefined || stated === null) {
    throw hdu.header.error(
      "no axis of the matrix is called FREQ, and no table gives REF_FREQ: expected a frequency",
      "MAXIS",
      "Without it u, v, w have no wavelengths",
    );
  }
  notes.note("missing-frequency-axis", "no FREQ axis: the frequency is REF_FREQ of the tables");
  return stated;
}

/** One UV_DATA table. */
interface UvTable extends RowReader {
  readonly hasWeights: boolean;
  /** index in the dataset of its first row */
  readonly firstRow: number;
}

function readersOf(
  file: FitsFile,
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
      source: file.source,
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
async function* blocksOf(tables: readonly UvTable[], request: BlockRequest): AsyncGenerator<SampleBlock> {
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
