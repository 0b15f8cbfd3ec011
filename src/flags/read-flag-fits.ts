/** Flags from the FLAG table of a FITS-IDI file, with visibilities or without. */
import { POLARIZATIONS, type Polarization } from "../dataset/dataset.ts";
import { type FitsFile, type Hdu, openFits } from "../dataset/fits/hdus.ts";
import { openSource } from "../dataset/fits/source.ts";
import { type Column, findColumn, requireColumn, tableLayout } from "../dataset/fits/table-layout.ts";
import { readTable, type Table } from "../dataset/fits/table-rows.ts";
import { STOKES_CODES } from "../dataset/fits-idi/small-tables.ts";
import { type FlagClock, rangeFromStored } from "../dataset/fits-tables/flag-times.ts";
import type { Selection } from "../dataset/selection.ts";
import { SECONDS_PER_DAY } from "../util/constants.ts";
import { mjdFromDate } from "../util/dates.ts";
import { InputError } from "../util/errors.ts";
import type { AcceptedFlag, AcceptedFlags } from "./accepted.ts";
import { foldSelections } from "./fold.ts";

const MOST_ROWS = 1_000_000;

/** @throws InputError when there is no FLAG table, or one that says what a selection cannot */
export async function readFlagFits(path: string): Promise<AcceptedFlags> {
  const file = await openFits(await openSource(path));
  const hdu = file.hdus.slice(1).find(({ name }) => name === "FLAG");
  if (hdu === undefined) {
    throw new InputError(
      "this FITS file has no FLAG table",
      { file: path },
      "Give the flags.json, flags.csv, flags.parquet or flags.fits that visvet check wrote",
    );
  }
  const layout = tableLayout(hdu);
  if (layout.rows > MOST_ROWS) throw hdu.header.error(`${layout.rows} rows: at most ${MOST_ROWS}`, "NAXIS2");
  const cursor = await file.source.cursor();
  let table: Table;
  try {
    table = await readTable(cursor, layout);
  } finally {
    await cursor.close();
  }
  const context = contextOf(file, hdu, table);
  const rows = Array.from({ length: table.rows }, (_, row) => ({
    reason: context.reason === undefined ? "" : table.text(row, context.reason),
    selection: selectionOf(table, row, context),
  }));
  const name = file.hdus[0].header.shown("DATASET")?.trim();
  return { dataset: name === undefined || name === "" ? null : name, flags: flagsOf(rows) };
}

interface Context {
  readonly file: FitsFile;
  readonly hdu: Hdu;
  readonly clock: FlagClock | undefined;
  readonly products: readonly (Polarization | undefined)[];
  /** a number other than "all" says no more than all where there is one of its kind */
  readonly oneSetup: boolean;
  readonly oneArray: boolean;
  readonly source: Column | undefined;
  readonly array: Column | undefined;
  readonly setup: Column | undefined;
  readonly antennas: Column;
  readonly times: Column;
  readonly bands: Column | undefined;
  readonly channels: Column;
  readonly pflags: Column;
  readonly reason: Column | undefined;
}

function contextOf(file: FitsFile, hdu: Hdu, { layout }: Table): Context {
  const ofName = (name: string) => file.hdus.filter((one) => one.name === name);
  const frequencies = ofName("FREQUENCY")[0];
  return {
    file,
    hdu,
    clock: clockOf(ofName("ARRAY_GEOMETRY")[0] ?? hdu, hdu),
    products: productsOf(hdu),
    oneSetup: frequencies !== undefined && frequencies.header.integer("NAXIS2", 0) === 1,
    oneArray: ofName("ARRAY_GEOMETRY").length === 1,
    source: findColumn(layout, "SOURCE_ID", "SOURCE"),
    array: findColumn(layout, "ARRAY"),
    setup: findColumn(layout, "FREQID"),
    antennas: requireColumn(layout, "ANTS"),
    times: requireColumn(layout, "TIMERANG"),
    bands: findColumn(layout, "BANDS"),
    channels: requireColumn(layout, "CHANS"),
    pflags: requireColumn(layout, "PFLAGS"),
    reason: findColumn(layout, "REASON"),
  };
}

function clockOf(geometry: Hdu, flags: Hdu): FlagClock | undefined {
  const { header } = geometry;
  const date = flags.header.shown("RDATE") ?? header.shown("RDATE");
  const referenceDay = date === undefined ? Number.NaN : mjdFromDate(date);
  if (Number.isNaN(referenceDay)) return undefined;
  const system = (header.shown("TIMSYS") ?? header.shown("TIMESYS") ?? "UTC").trim().toUpperCase();
  if (system === "UTC" || system === "") return { referenceDay, timeOffset: 0 };
  const ahead = ["DATUTC", "IATUTC"]
    .map((key) => header.looseNumber(key))
    .find((value) => (value ?? 0) !== 0);
  return { referenceDay, timeOffset: (ahead ?? 0) / SECONDS_PER_DAY };
}

function productsOf({ header }: Hdu): (Polarization | undefined)[] {
  const first = header.requiredInteger("STK_1", -8, 4);
  const count = header.requiredInteger("NO_STKD", 1, 4);
  const step = first < 0 ? -1 : 1;
  return Array.from({ length: count }, (_, i) =>
    POLARIZATIONS.find((name) => STOKES_CODES[name] === first + i * step),
  );
}

function selectionOf(table: Table, row: number, context: Context): Selection {
  const { hdu } = context;
  const refuse = (what: string) =>
    new InputError(
      what,
      { ...hdu.header.place, row: row + 1 },
      "Selections know neither: say it by time or field",
    );
  const positive = (column: Column | undefined, k = 0) => {
    const value = column === undefined ? 0 : table.number(row, column, k);
    return value > 0 ? value : null;
  };
  const setup = positive(context.setup);
  if (setup !== null && !context.oneSetup) throw refuse(`the flag is for frequency setup ${setup} alone`);
  const array = positive(context.array);
  if (array !== null && !context.oneArray) throw refuse(`the flag is for array ${array} alone`);
  const source = positive(context.source);
  const [one, two] = [positive(context.antennas), positive(context.antennas, 1)];
  return {
    antennas: one !== null && two !== null ? null : one === null && two === null ? null : [one ?? two!],
    baselines: one !== null && two !== null ? [[one, two]] : null,
    time: timeOf(table, row, context),
    subbands: bandsOf(table, row, context.bands),
    channels: channelsOf(table, row, context.channels),
    polarizations: polarizationsOf(table, row, context),
    fields: source === null ? null : [source],
  };
}

function timeOf(table: Table, row: number, { times, clock, hdu }: Context): [number, number] | null {
  const stored = [table.number(row, times, 0), table.number(row, times, 1)] as const;
  if (stored[0] === 0 && stored[1] === 0) return null;
  if (clock === undefined || !Number.isFinite(stored[0] + stored[1])) {
    throw new InputError(
      "the flag names times that cannot be dated: expected RDATE, and finite days after it",
      { ...hdu.header.place, row: row + 1 },
    );
  }
  return rangeFromStored(stored, clock, times.code === "D" ? "D" : "E");
}

function bandsOf(table: Table, row: number, column: Column | undefined): number[] | null {
  if (column === undefined) return null;
  const taken = Array.from(table.numbers(row, column), (value, i) => (value > 0 ? i : -1));
  return taken.every((i) => i >= 0) ? null : taken.filter((i) => i >= 0);
}

/** From 1 in the table; a last of 0 means to the end. */
function channelsOf(table: Table, row: number, column: Column): [number, number][] | null {
  const [first, last] = [table.number(row, column, 0), table.number(row, column, 1)];
  if (!(first > 0) && !(last > 0)) return null;
  return [[Math.max(1, first || 1) - 1, (last > 0 ? last : 2 ** 31) - 1]];
}

function polarizationsOf(table: Table, row: number, { pflags, products }: Context): Polarization[] | null {
  const values = pflags.code === "X" ? table.bits(row, pflags).map(Number) : table.numbers(row, pflags);
  const taken = products.filter((_, i) => (values[i] ?? 0) > 0);
  return taken.length === products.length ? null : taken.filter((name) => name !== undefined);
}

interface ReasonedRow {
  readonly reason: string;
  readonly selection: Selection;
}

/** Rows that one flag was split into are joined again; the reason begins with its id. Others stay by themselves. */
function flagsOf(rows: readonly ReasonedRow[]): AcceptedFlag[] {
  const byId = new Map<string, { rule: string; reason: string; selections: Selection[] }>();
  for (const [i, { reason, selection }] of rows.entries()) {
    const ours = /^(F\d+) (\S*)$/.exec(reason);
    const id = ours?.[1] ?? `R${i + 1}`;
    const known = byId.get(id);
    if (known !== undefined) known.selections.push(selection);
    else byId.set(id, { rule: ours?.[2] ?? "", reason, selections: [selection] });
  }
  return [...byId].flatMap(([id, { rule, reason, selections }]) => {
    const folded = foldSelections(selections);
    return folded.map((selection, i) => ({
      ...selection,
      id: folded.length === 1 ? id : `${id}.${i + 1}`,
      rule,
      reason,
    }));
  });
}
