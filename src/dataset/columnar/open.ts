/**
 * Tables of columns as a Dataset. They are read twice: once for what is in them (antennas, channels, fields), once into a
 * working copy in the folder for temporary files, whose rows and samples lie as every later pass wants them.
 */
import { stat } from "node:fs/promises";
import { resolve } from "node:path";
import { dateFromMjd, mjdFromDate } from "../../util/dates.ts";
import { InputError } from "../../util/errors.ts";
import type { ArrayInfo, Field, Note, Polarization, Setup, Shape } from "../dataset.ts";
import { datasetName } from "../name.ts";
import { Notes } from "../notes.ts";
import type { OpenOptions } from "../recipe.ts";
import { type OpenedDataset, type RowSummary, summarizeRows } from "../row-summary.ts";
import { readAntennaFile } from "./antenna-file.ts";
import { resolveAxes } from "./axes.ts";
import type { ColumnMap } from "./column-map.ts";
import { resolveAntennas, resolveFields } from "./facts.ts";
import { findLabels } from "./find-labels.ts";
import { type GatherCounts, gatherRows } from "./gather.ts";
import { openTable, requireSameColumns } from "./open-tables.ts";
import { completeMap, findMap } from "./resolve-map.ts";
import { type Spool, spoolOf } from "./spool.ts";
import { spoolBlocks } from "./spool-blocks.ts";
import { type SpoolCounts, SpoolWriter } from "./spool-writer.ts";
import type { Table } from "./table.ts";

export { looksColumnar } from "./open-tables.ts";

export interface ColumnarDataset extends OpenedDataset {
  /** what the columns were taken for */
  readonly columnMap: ColumnMap;
}

export interface ColumnarOptions extends OpenOptions {
  /** `summary` of the same files from an earlier opening: saves a pass over the rows */
  readonly known?: RowSummary | undefined;
}

/** All of a Dataset that the tables tell, as plain JSON. */
interface TableFacts {
  readonly array: ArrayInfo;
  readonly fields: readonly Field[];
  readonly setups: readonly { id: number; frequencies: number[]; channelWidths: number[] }[];
  readonly polarizations: readonly Polarization[];
  readonly shape: Shape;
  readonly rows: number;
  readonly gaps: boolean;
  readonly notes: readonly Note[];
}

/**
 * @param files the parts of one table, in the order of their rows
 * @throws InputError where a file is malformed, or what a column holds cannot be told
 */
export async function openColumnar(
  files: readonly string[],
  options: ColumnarOptions = {},
): Promise<ColumnarDataset> {
  const tables: Table[] = [];
  for (const file of files) tables.push(await openTable(file));
  const [first] = tables;
  if (first === undefined) throw new InputError("no file is named");
  const notes = new Notes();
  const map = await completeMap(await findMap(options.columnMap, first), first, notes);
  requireSameColumns(tables, map);
  const spool = await spoolOf(await identityOf(tables, map), (folder) => unpack(tables, map, folder));
  const dataset = datasetOf(spool, tables, map);
  const summary = options.known ?? (await summarizeRows(dataset));
  noteRows(summary, notes);
  return {
    ...dataset,
    notes: [...notes.list(), ...spool.facts.notes],
    summary,
    recipe: {
      kind: "files",
      paths: [...files],
      options: options.columnMap === undefined ? {} : { columnMap: options.columnMap },
      known: [summary],
    },
  };
}

async function identityOf(tables: readonly Table[], map: ColumnMap): Promise<string> {
  const named = [...tables.map(({ file }) => file), map.constants.antennaFile ?? []].flat();
  const parts: unknown[] = [];
  for (const file of named) {
    const status = await stat(file).catch(() => undefined);
    parts.push([resolve(file), status?.size, status?.mtimeMs, status?.ino]);
  }
  return JSON.stringify([parts, map]);
}

function datasetOf(
  spool: Spool<TableFacts>,
  tables: readonly Table[],
  map: ColumnMap,
): Omit<ColumnarDataset, "summary"> {
  const { facts } = spool;
  const { uses, constants } = map;
  const setups = facts.setups.map(
    ({ id, frequencies, channelWidths }): Setup => ({
      id,
      frequencies: Float64Array.from(frequencies),
      channelWidths: Float64Array.from(channelWidths),
    }),
  );
  const { rows, shape, gaps } = facts;
  return {
    name: datasetName(tables[0]!.file),
    files: tables.map(({ file }) => file),
    bytes: tables.reduce((sum, { bytes }) => sum + bytes, 0),
    format: "columnar",
    header: { ...constants.header },
    array: facts.array,
    fields: facts.fields,
    setups,
    polarizations: facts.polarizations,
    shape,
    unit: constants.unit ?? "uncalibrated",
    hasWeights: uses.weight !== undefined || uses.sigma !== undefined,
    rows,
    notes: facts.notes,
    columnMap: map,
    // The working copy stays for as long as somebody may ask for blocks.
    blocks: (request) => spoolBlocks({ folder: spool.folder, rows, shape, gaps }, request),
  };
}

/** Both readings of the tables; the working copy is in `folder` after them. */
async function unpack(tables: readonly Table[], map: ColumnMap, folder: string): Promise<TableFacts> {
  const notes = new Notes();
  const { antennaFile, antennas, diameter } = map.constants;
  const file = tables[0]!.file;
  const found = await findLabels(tables, map.uses, map.lists.length > 0);
  if (found.tableRows === 0) {
    throw new InputError(
      "the table has no rows",
      { file },
      "Writing has not begun, or a filter left nothing",
    );
  }
  const table = antennaFile === undefined ? (antennas ?? []) : await readAntennaFile(antennaFile, diameter);
  const axes = resolveAxes(map, found, notes, file);
  const { array, antennaOf } = resolveAntennas(map, table, found, notes);
  const { fields, fieldOf, onlyField } = resolveFields(map, found, notes);
  const { subbands, channels, polarizations } = axes.shape;
  const writer = new SpoolWriter(folder, subbands * channels * polarizations);
  let counts: GatherCounts;
  let spooled: SpoolCounts;
  try {
    counts = await gatherRows(tables, map, axes, { antennaOf, fieldOf, onlyField }, writer);
    spooled = writer.finish();
  } catch (error) {
    writer.close();
    throw error;
  }
  noteSamples(spooled, counts, subbands * channels * polarizations, notes);
  return {
    array,
    fields,
    setups: axes.setups.map((setup) => ({
      id: setup.id,
      frequencies: [...setup.frequencies],
      channelWidths: [...setup.channelWidths],
    })),
    polarizations: axes.polarizations,
    shape: axes.shape,
    rows: spooled.rows,
    gaps: spooled.missing > 0,
    notes: notes.list(),
  };
}

function noteSamples(spooled: SpoolCounts, counts: GatherCounts, rowSamples: number, notes: Notes): void {
  const { rows, missing, twice } = spooled;
  if (missing > 0) {
    const text = `${missing} of ${rows * rowSamples} samples are not in the table: they count as flagged`;
    notes.note("samples-missing", text);
  }
  if (counts.empty > 0) {
    notes.note("samples-empty", `${counts.empty} samples have no value or no weight: they count as flagged`);
  }
  if (twice > 0) {
    notes.fault("samples-twice", `${twice} samples come more than once in the table: the first counts`);
  }
  if (counts.uvwDiffer > 0) {
    const text = `${counts.uvwDiffer} samples have other u, v, w than the first of their baseline and time, which count`;
    notes.fault("uvw-disagree", text);
  }
}

function noteRows(summary: RowSummary, notes: Notes): void {
  if (summary.rowsWithoutTime > 0)
    notes.fault("time-not-finite", `${summary.rowsWithoutTime} rows have no time`);
  if (summary.rowsWithoutUvw > 0) {
    notes.fault("uvw-not-finite", `${summary.rowsWithoutUvw} rows have a u, v or w that is not finite`);
  }
  // Radio interferometry began in 1946; what is later than 2100 is damage.
  const [earliest, latest] = [mjdFromDate("1946-01-01"), mjdFromDate("2100-01-01")];
  if (summary.firstTime < earliest || summary.lastTime > latest) {
    notes.fault(
      "impossible-time",
      `times run from ${dateFromMjd(summary.firstTime)} to ${dateFromMjd(summary.lastTime)} ` +
        `(MJD ${summary.firstTime} to ${summary.lastTime})`,
    );
  }
}
