/** A random-groups file as a Dataset: tables first, then one pass over the rows, then what only both together tell. */
import type { BlockRequest, Field, Setup, Shape } from "../dataset.ts";
import type { FitsFile } from "../fits/hdus.ts";
import { type RowReader, readBlocks } from "../fits-rows/blocks.ts";
import type { RowColumns } from "../fits-rows/columns.ts";
import type { RowContext } from "../fits-rows/rows.ts";
import { type AntennaTable, readAntennaTable, timeOffsets } from "../fits-tables/antenna-table.ts";
import { arrayInfo } from "../fits-tables/array-info.ts";
import { fieldsOfRows, noteImpossibleFields, readFieldTable } from "../fits-tables/fields.ts";
import { headerFacts, noteDates, polarizationsOf, telescopeOf, unitOf } from "../fits-tables/header-facts.ts";
import { noteRows } from "../fits-tables/note-rows.ts";
import { readSetups } from "../fits-tables/setups.ts";
import { distinctNumbers, withSubarrayNumbers } from "../fits-tables/subarray-numbers.ts";
import { datasetName } from "../name.ts";
import type { Notes } from "../notes.ts";
import { type OpenedDataset, type RowSummary, summarizeRows } from "../row-summary.ts";
import { TableFlags } from "../table-flags.ts";
import { readFlagTable } from "./flag-table.ts";
import { type GroupLayout, groupLayout } from "./layout.ts";
import { rowColumns } from "./parameters.ts";
import { groupStore, groupWeights, sampleLayout } from "./row-store.ts";
import { findTables } from "./tables.ts";
import { WORDS } from "./words.ts";

/**
 * @param known of the same file, from an earlier opening: saves the pass over the rows
 * @throws InputError where the file is malformed
 */
export async function openRandomGroups(file: FitsFile, known?: RowSummary): Promise<OpenedDataset> {
  const { notes, source } = file;
  const primary = file.hdus[0];
  const layout = groupLayout(primary, notes);
  const polarizations = polarizationsOf(layout.stokes, primary.header);
  const samples = sampleLayout(layout);
  const { shape } = samples;
  const tables = await readTables(file, layout, shape, notes);
  const columns = rowColumns(layout, tables.reference);
  noteColumns(columns, notes);
  const context = rowContext(columns, tables);
  const reader: RowReader = {
    source,
    store: groupStore(layout),
    samples,
    context,
    weights: groupWeights(columns),
    flags: tables.flags,
  };
  const { tables: antennas, numbers } = distinctNumbers(tables.antennas, notes);
  const blocks = withSubarrayNumbers((request: BlockRequest) => readBlocks(reader, request), numbers);
  const summary = known ?? (await summarizeRows({ rows: layout.groups, blocks }));
  noteRows(summary, tables.hasSetupTable ? context.strangeSetups : new Set(), WORDS, notes);
  noteDates([primary.header], summary, notes);
  const centre = { header: primary.header, ...layout };
  const fields = fieldsOfRows(centre, columns.source !== undefined, tables.fields, summary, WORDS, notes);
  noteImpossibleFields(fields, notes);
  const array = arrayInfo(antennas, fields, summary, telescopeOf([primary.header]), WORDS, notes);
  return {
    name: datasetName(source.path),
    files: [source.path],
    bytes: source.bytesOnDisk,
    format: "random-groups",
    header: headerFacts([primary.header]),
    array,
    fields,
    setups: tables.setups,
    polarizations,
    shape,
    unit: unitOf(primary.header.shown("BUNIT")),
    hasWeights: layout.complex.length === 3 || columns.weight !== undefined,
    rows: layout.groups,
    notes: notes.list(),
    summary,
    blocks,
  };
}

interface TablesRead {
  readonly antennas: readonly AntennaTable[];
  /** CRVAL of the FREQ axis, or what stands in for it, Hz */
  readonly reference: number;
  readonly setups: readonly Setup[];
  /** the setups are those of a frequency table, and FREQSEL means something */
  readonly hasSetupTable: boolean;
  readonly fields: readonly Field[] | undefined;
  readonly flags: TableFlags | undefined;
}

async function readTables(
  file: FitsFile,
  layout: GroupLayout,
  shape: Shape,
  notes: Notes,
): Promise<TablesRead> {
  const hdus = findTables(file, notes);
  const cursor = await file.source.cursor(layout.hdu.dataStart + layout.hdu.dataBytes);
  try {
    const antennas: AntennaTable[] = [];
    for (const hdu of hdus.antennas) antennas.push(await readAntennaTable(cursor, hdu, notes));
    const reference = referenceFrequency(layout, antennas, notes);
    const spectrum = { header: layout.hdu.header, ...layout };
    const setups = await readSetups(cursor, hdus.frequencies, spectrum, reference, WORDS, notes);
    const fields = hdus.sources === undefined ? undefined : await readFieldTable(cursor, hdus.sources, notes);
    const flags =
      hdus.flags === undefined ? [] : await readFlagTable(cursor, hdus.flags, antennas, setups, shape, notes);
    return {
      antennas,
      reference,
      setups,
      hasSetupTable: hdus.frequencies !== undefined,
      fields,
      flags: flags.length === 0 ? undefined : new TableFlags(flags),
    };
  } finally {
    await cursor.close();
  }
}

/** CRVAL of the FREQ axis; FREQ of the antenna table where there is no such axis. */
function referenceFrequency(
  { frequency, hdu }: GroupLayout,
  tables: readonly AntennaTable[],
  notes: Notes,
): number {
  if (!Number.isNaN(frequency.value)) return frequency.value;
  const stated = tables.find((table) => table.frequency !== null)?.frequency;
  if (stated === undefined || stated === null) {
    throw hdu.header.error(
      "no axis of the group is called FREQ, and no antenna table gives FREQ: expected a frequency",
      "NAXIS",
      "Without it u, v, w have no wavelengths",
    );
  }
  notes.note("missing-frequency-axis", "no FREQ axis: the frequency is that of the antenna table");
  return stated;
}

function rowContext(columns: RowColumns, { setups, fields, antennas }: TablesRead): RowContext {
  return {
    columns,
    words: WORDS,
    setupIndex: new Map(setups.map(({ id }, index) => [id, index])),
    fallbackSetup: setups.length === 1 ? 0 : undefined,
    strangeSetups: new Set(),
    // A table of one source names the field of rows that do not.
    onlyField: fields?.length === 1 ? fields[0]!.id : 1,
    timeOffset: timeOffsets(antennas),
  };
}

function noteColumns(columns: RowColumns, notes: Notes): void {
  if (columns.w === undefined)
    notes.fault("missing-w", "no parameter WW: w is taken as 0 and cannot be judged");
}
