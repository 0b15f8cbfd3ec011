/** A random-groups file as a Dataset: tables first, then one pass over the rows, then what only both together tell. */
import type { BlockRequest, Field, Setup, Shape } from "../dataset.ts";
import type { FitsFile } from "../fits/hdus.ts";
import { readBlocks } from "../fits-rows/blocks.ts";
import type { RowContext } from "../fits-rows/rows.ts";
import { sampleLayout } from "../fits-rows/samples.ts";
import { type AntennaTable, readAntennaTable } from "../fits-tables/antenna-table.ts";
import { arrayInfo } from "../fits-tables/array-info.ts";
import { fieldsOfRows, noteImpossibleFields, readFieldTable } from "../fits-tables/fields.ts";
import { headerFacts, noteDates, polarizationsOf, telescopeOf, unitOf } from "../fits-tables/header-facts.ts";
import { readSetups } from "../fits-tables/setups.ts";
import { datasetName } from "../name.ts";
import type { Notes } from "../notes.ts";
import { type OpenedDataset, type RowSummary, summarizeRows } from "../row-summary.ts";
import { TableFlags } from "../table-flags.ts";
import { readFlagTable } from "./flag-table.ts";
import { type GroupLayout, groupLayout } from "./layout.ts";
import { type RowColumns, rowColumns } from "./parameters.ts";
import { findTables } from "./tables.ts";

/**
 * @param known of the same file, from an earlier opening: saves the pass over the rows
 * @throws InputError where the file is malformed
 */
export async function openRandomGroups(file: FitsFile, known?: RowSummary): Promise<OpenedDataset> {
  const { notes, source } = file;
  const primary = file.hdus[0];
  const layout = groupLayout(primary, notes);
  const polarizations = polarizationsOf(layout);
  const shape = sampleLayout(layout).shape;
  const tables = await readTables(file, layout, shape, notes);
  const columns = rowColumns(layout, tables.reference);
  noteParameters(columns, notes);
  const context = rowContext(columns, tables);
  const blocks = (request: BlockRequest) => readBlocks(source, layout, context, tables.flags, request);
  const summary = known ?? (await summarizeRows({ rows: layout.groups, blocks }));
  noteRows(summary, tables.hasSetupTable ? context.strangeSetups : new Set(), notes);
  noteDates(primary.header, summary, notes);
  const fields = fieldsOfRows(layout, columns.source !== undefined, tables.fields, summary, notes);
  noteImpossibleFields(fields, notes);
  const array = arrayInfo(tables.antennas, fields, summary, telescopeOf(primary.header), notes);
  return {
    name: datasetName(source.path),
    files: [source.path],
    bytes: source.bytesOnDisk,
    format: "random-groups",
    header: headerFacts(primary.header),
    array,
    fields,
    setups: tables.setups,
    polarizations,
    shape,
    unit: unitOf(primary.header),
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
    const setups = await readSetups(cursor, hdus.frequencies, layout, reference, notes);
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
  const most = Math.max(0, ...antennas.map(({ subarray }) => subarray));
  const timeOffset = new Float64Array(Math.min(most, 9999) + 1).fill(antennas[0]?.timeOffset ?? 0);
  for (const table of antennas) timeOffset[table.subarray] = table.timeOffset;
  return {
    columns,
    setupIndex: new Map(setups.map(({ id }, index) => [id, index])),
    fallbackSetup: setups.length === 1 ? 0 : undefined,
    strangeSetups: new Set(),
    // A table of one source names the field of rows that do not.
    onlyField: fields?.length === 1 ? fields[0]!.id : 1,
    timeOffset,
  };
}

function noteParameters(columns: RowColumns, notes: Notes): void {
  if (columns.w === undefined)
    notes.fault("missing-w", "no parameter WW: w is taken as 0 and cannot be judged");
}

function noteRows(summary: RowSummary, strangeSetups: ReadonlySet<number>, notes: Notes): void {
  if (strangeSetups.size > 0) {
    const ids = [...strangeSetups].slice(0, 10).join(", ");
    notes.fault(
      "setup-not-in-table",
      `rows name frequency setup (FREQSEL) ${ids}: taken as the only one there is`,
    );
  }
  if (summary.rowsWithoutTime > 0) {
    notes.fault("time-not-finite", `${summary.rowsWithoutTime} rows have a time (DATE) that is not finite`);
  }
  if (summary.rowsWithoutUvw > 0) {
    notes.fault("uvw-not-finite", `${summary.rowsWithoutUvw} rows have a u, v or w that is not finite`);
  }
}
