/** One antenna table (AN, or ARRAY_GEOMETRY) as it stands in the file: numbers, names, positions, Earth orientation. */
import { SECONDS_PER_DAY } from "../../util/constants.ts";
import { mjdFromDate } from "../../util/dates.ts";
import type { Cursor } from "../fits/byte-source.ts";
import type { Hdu } from "../fits/hdus.ts";
import { type Column, findColumn, requireColumn, tableLayout } from "../fits/table-layout.ts";
import { readTable, type Table } from "../fits/table-rows.ts";
import type { Notes } from "../notes.ts";
import { lastWord } from "./last-word.ts";

export type Position = readonly [number, number, number];

export interface TableAntenna {
  readonly number: number;
  readonly name: string;
  /** STABXYZ as stored, metres; null where it is not finite or missing */
  readonly offset: Position | null;
  readonly diameter: number | null;
}

export interface AntennaTable {
  readonly subarray: number;
  readonly part: string;
  readonly antennas: readonly TableAntenna[];
  readonly arrayName: string;
  /** ARRAYX, ARRAYY, ARRAYZ, metres */
  readonly origin: Position;
  /** FRAME and XYZHAND, upper case, empty when missing */
  readonly frame: string;
  readonly hand: string;
  /** degrees; null when missing */
  readonly siderealTime: number | null;
  readonly degreesPerDay: number | null;
  /** MJD of RDATE; null when missing or no date */
  readonly referenceDay: number | null;
  readonly ut1MinusUtc: number;
  readonly timeSystem: string;
  /** the file's time - UTC, days */
  readonly timeOffset: number;
  /** FREQ, Hz; null when missing */
  readonly frequency: number | null;
}

/** The largest BASELINE code names 2047 antennas; ANTENNA1 and ANTENNA2 may go on to this. */
const MOST_ANTENNAS = 65_535;
const MOST_SUBARRAY = 9999;

/**
 * @param numbers of antennas by `nameKey`, where another table gives them: they stand before those of this table
 * @throws InputError when the table is malformed
 */
export async function readAntennaTable(
  cursor: Cursor,
  hdu: Hdu,
  notes: Notes,
  numbers: ReadonlyMap<string, number> = new Map(),
): Promise<AntennaTable> {
  const { header } = hdu;
  const layout = tableLayout(hdu);
  if (layout.rows > MOST_ANTENNAS) {
    throw header.error(
      `the ${lastWord(hdu)} table has ${layout.rows} rows: expected at most ${MOST_ANTENNAS}`,
      "NAXIS2",
    );
  }
  const table = await readTable(cursor, layout);
  const part = header.place.part!;
  const rdate = header.shown("RDATE");
  const referenceDay = rdate === undefined ? Number.NaN : mjdFromDate(rdate);
  if (rdate !== undefined && Number.isNaN(referenceDay)) {
    notes.fault("odd-date", `${part}: RDATE is "${rdate}", which is no date`);
  }
  const degreesPerDay = header.looseNumber("DEGPDY");
  return {
    subarray: hdu.version,
    part,
    antennas: readAntennas(table, part, numbers, notes),
    arrayName: (header.shown("ARRNAM") ?? "").trim(),
    origin: [
      header.looseNumber("ARRAYX") ?? 0,
      header.looseNumber("ARRAYY") ?? 0,
      header.looseNumber("ARRAYZ") ?? 0,
    ],
    frame: (header.shown("FRAME") ?? "").trim().toUpperCase(),
    hand: (header.shown("XYZHAND") ?? "").trim().toUpperCase(),
    siderealTime: header.looseNumber("GSTIA0") ?? null,
    degreesPerDay: degreesPerDay !== undefined && Math.abs(degreesPerDay - 361) < 1 ? degreesPerDay : null,
    referenceDay: Number.isNaN(referenceDay) ? null : referenceDay,
    ut1MinusUtc: header.looseNumber("UT1UTC") ?? 0,
    ...readTimeSystem(hdu, part, notes),
    frequency: header.looseNumber("FREQ") ?? null,
  };
}

/** Antennas of several tables are one when their names are, whatever the case and padding. */
export function nameKey(name: string): string {
  return name.trim().toUpperCase();
}

function readAntennas(
  table: Table,
  part: string,
  numbers: ReadonlyMap<string, number>,
  notes: Notes,
): TableAntenna[] {
  const { layout } = table;
  const name = findColumn(layout, "ANNAME");
  const position = [findColumn(layout, "STABXYZ")].find((column) => (column?.repeat ?? 0) >= 3);
  const number = findColumn(layout, "NOSTA");
  const diameter = findColumn(layout, "DIAMETER");
  if (number === undefined && numbers.size === 0) {
    const text = `${part} has no column NOSTA: antennas are numbered by their rows`;
    notes.note("missing-antenna-numbers", text);
  }
  if (name === undefined && position === undefined) requireColumn(layout, "STABXYZ");
  const taken = new Set(numbers.values());
  const found = new Map<number, TableAntenna>();
  const twice: number[] = [];
  const unnumbered: string[] = [];
  for (let row = 0; row < table.rows; row++) {
    const text = name === undefined ? "" : table.text(row, name).trim();
    const given = numbers.get(nameKey(text));
    const id = given ?? (number === undefined ? row + 1 : antennaNumber(table, row, number));
    if (given === undefined && taken.has(id)) unnumbered.push(text);
    else if (found.has(id)) twice.push(id);
    else {
      found.set(id, {
        number: id,
        name: text === "" ? String(id) : text,
        offset: position === undefined ? null : positionOf(table, row, position),
        diameter: diameterOf(table, row, diameter),
      });
    }
  }
  if (unnumbered.length > 0) {
    const text = `${part}: no number is given to ${unnumbered.slice(0, 10).join(", ")}: no row can name them`;
    notes.note("antenna-without-number", text);
  }
  noteOdd([...found.values()], twice, position, part, notes);
  return [...found.values()];
}

/** @throws InputError when it is no number of an antenna */
export function antennaNumber(table: Table, row: number, column: Column): number {
  const id = table.number(row, column);
  if (!Number.isInteger(id) || id < 0 || id > MOST_ANTENNAS) {
    throw table.layout.hdu.header.error(
      `row ${row + 1}: ${column.name} is ${id}: expected a whole number from 0 to ${MOST_ANTENNAS}`,
    );
  }
  return id;
}

function positionOf(table: Table, row: number, column: Column): Position | null {
  const [x, y, z] = table.numbers(row, column);
  return Number.isFinite(x! + y! + z!) ? [x!, y!, z!] : null;
}

function diameterOf(table: Table, row: number, column: Column | undefined): number | null {
  if (column === undefined) return null;
  const metres = table.number(row, column);
  return metres > 0 && Number.isFinite(metres) ? metres : null;
}

function noteOdd(
  antennas: readonly TableAntenna[],
  twice: readonly number[],
  position: Column | undefined,
  part: string,
  notes: Notes,
): void {
  if (twice.length > 0) {
    const text = `${part} has more than one row for antenna ${twice.slice(0, 10).join(", ")}: the first counts`;
    notes.fault("antenna-twice", text);
  }
  const lost = antennas.filter(({ offset }) => offset === null).map(({ number }) => number);
  if (lost.length === 0) return;
  if (position === undefined) {
    const text = `${part} has no column STABXYZ: the positions of the antennas are unknown`;
    notes.note("missing-antenna-positions", text);
  } else {
    const text = `${part}: STABXYZ is not finite for antenna ${lost.slice(0, 10).join(", ")}`;
    notes.fault("table-value-not-finite", text);
  }
}

/** TIMSYS or TIMESYS; DATUTC or IATUTC is what the file's time is ahead of UTC when it is not UTC. */
function readTimeSystem(
  { header }: Hdu,
  part: string,
  notes: Notes,
): { timeSystem: string; timeOffset: number } {
  const timeSystem = (header.shown("TIMSYS") ?? header.shown("TIMESYS") ?? "UTC").trim().toUpperCase();
  if (timeSystem === "UTC" || timeSystem === "") return { timeSystem: "UTC", timeOffset: 0 };
  const ahead = ["DATUTC", "IATUTC"]
    .map((key) => header.looseNumber(key))
    .find((value) => (value ?? 0) !== 0);
  if (ahead === undefined) {
    const text = `${part}: times are ${timeSystem} and no offset from UTC is given; they are taken as UTC`;
    notes.fault("missing-time-offset", text);
  }
  return { timeSystem, timeOffset: (ahead ?? 0) / SECONDS_PER_DAY };
}

/** The file's time - UTC, days, by sub-array number; [0] for those without a table. */
export function timeOffsets(tables: readonly AntennaTable[]): Float64Array {
  const most = Math.max(0, ...tables.map(({ subarray }) => subarray));
  const offsets = new Float64Array(Math.min(most, MOST_SUBARRAY) + 1).fill(tables[0]?.timeOffset ?? 0);
  for (const table of tables) offsets[table.subarray] = table.timeOffset;
  return offsets;
}
