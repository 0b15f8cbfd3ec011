/** A FITS-IDI file as a Dataset: small tables first, then one pass over the rows, then what only both together tell. */
import type { BlockRequest, Shape } from "../dataset.ts";
import type { FitsFile } from "../fits/hdus.ts";
import { type AntennaTable, readAntennaTable } from "../fits-tables/antenna-table.ts";
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
import type { UvLayout } from "./uv-layout.ts";
import { blocksOf, shapeOf, type TablesRead, uvTables } from "./uv-rows.ts";
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
  const rowTables = uvTables(source, layouts, tables, notes);
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
