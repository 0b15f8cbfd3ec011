/** FITS-IDI files made to measure, bytes and truth, for the tests of reading. */
import {
  type AxisToWrite,
  binaryTable,
  type CardToWrite,
  type ColumnToWrite,
  card,
  headerBlocks,
  real,
} from "../../src/dataset/fits/write.ts";
import { DAY } from "./group-file.ts";

/** Lengths of the plain file: rows, and its axes. */
export const ROWS = 4;
export const PRODUCTS = 2;
export const CHANNELS = 3;
export const BANDS = 2;

export const AXES = {
  complex: { type: "COMPLEX", length: 2, value: 1, step: 1 },
  weighted: { type: "COMPLEX", length: 3, value: 1, step: 1 },
  stokes: { type: "STOKES", length: PRODUCTS, value: -1, step: -1 },
  freq: { type: "FREQ", length: CHANNELS, value: 1.4e9, step: 1e6 },
  band: { type: "BAND", length: BANDS, value: 1, step: 1 },
  ra: { type: "RA", length: 1, value: 123.5, step: 1 },
  dec: { type: "DEC", length: 1, value: -30.25, step: 1 },
} satisfies Record<string, AxisToWrite>;

export const USUAL_AXES: readonly AxisToWrite[] = [
  AXES.complex,
  AXES.stokes,
  AXES.freq,
  AXES.band,
  AXES.ra,
  AXES.dec,
];

type At = Readonly<Record<string, number>>;

/** A number for each element that float32 holds exactly, telling all indices apart. */
export function marker(row: number, at: At): number {
  const sample = ((row * 8 + (at.BAND ?? 0)) * 16 + (at.FREQ ?? 0)) * 4 + (at.STOKES ?? 0);
  return sample * 4 + (at.COMPLEX ?? 0) + 1;
}

export interface UvSpec {
  readonly rows: number;
  /** first axis fastest */
  readonly axes: readonly AxisToWrite[];
  /** stored value of an element by the index (from 0) on each axis type */
  readonly stored: (row: number, at: At) => number;
  /** code of the matrix elements */
  readonly code: string;
  readonly fluxName: string;
  readonly fluxKeywords: NonNullable<ColumnToWrite["keywords"]>;
  readonly fluxUnit: string;
  /** before the matrix, by row from 0; undefined leaves one out */
  readonly columns: Readonly<Record<string, ColumnOf | undefined>>;
  /** after the matrix */
  readonly columnsAfter: Readonly<Record<string, ColumnOf | undefined>>;
  /** keywords besides those of the axes */
  readonly cards: readonly CardToWrite[];
  /** the matrix is marked by TMATXn */
  readonly marked: boolean;
  readonly firstRow: number;
}

export interface ColumnOf {
  readonly form: string;
  readonly cell: (row: number) => ColumnToWrite["cells"][number];
  readonly unit?: string;
  readonly keywords?: ColumnToWrite["keywords"];
}

/** Weights of product and band, product fastest: 1, 2, 3, 4 and a hundred a row. */
export function weightCell(row: number): number[] {
  return Array.from({ length: PRODUCTS * BANDS }, (_, k) => 100 * row + k + 1);
}

/** Rows of baselines 1-3 and 2-3 at two integrations. */
export const COLUMNS: Readonly<Record<string, ColumnOf>> = {
  UU: { form: "1D", cell: (row) => (row + 1) * 1e-9, unit: "SECONDS" },
  VV: { form: "1D", cell: (row) => -(row + 2) * 1e-9, unit: "SECONDS" },
  WW: { form: "1D", cell: (row) => (row / 2) * 1e-9, unit: "SECONDS" },
  DATE: { form: "1D", cell: () => DAY + 2400000.5, unit: "DAYS" },
  TIME: { form: "1D", cell: (row) => 0.25 + Math.floor(row / 2) / 1024, unit: "DAYS" },
  BASELINE: { form: "1J", cell: (row) => 256 * (1 + (row % 2)) + 3 },
  ARRAY: { form: "1J", cell: () => 1 },
  SOURCE_ID: { form: "1J", cell: () => 1 },
  FREQID: { form: "1J", cell: () => 1 },
  INTTIM: { form: "1E", cell: () => 10, unit: "SECONDS" },
  WEIGHT: { form: `${PRODUCTS * BANDS}E`, cell: weightCell },
};

/** A UV_DATA table; `spec` says what differs from the plain one. */
export function uvData(spec: Partial<UvSpec> = {}): Uint8Array {
  const full: UvSpec = {
    rows: ROWS,
    axes: USUAL_AXES,
    stored: marker,
    code: "E",
    fluxName: "FLUX",
    fluxKeywords: {},
    fluxUnit: "JY",
    columnsAfter: {},
    cards: [card("DATE-OBS", "2024-06-15"), card("TELESCOP", "Invented"), card("EQUINOX", "J2000")],
    marked: true,
    firstRow: 0,
    ...spec,
    columns: { ...COLUMNS, ...spec.columns },
  };
  const rows = Array.from({ length: full.rows }, (_, row) => row + full.firstRow);
  const elements = full.axes.reduce((product, { length }) => product * length, 1);
  const before = columnsOf(full.columns, rows);
  const flux: ColumnToWrite = {
    name: full.fluxName,
    form: `${elements}${full.code}`,
    unit: full.fluxUnit,
    cells: rows.map((row) => matrixOf(full, row, elements)),
    keywords: full.fluxKeywords,
  };
  const number = before.length + 1;
  return binaryTable({
    name: "UV_DATA",
    cards: [
      ...(full.marked ? [card(`TMATX${number}`, true)] : []),
      card("MAXIS", full.axes.length),
      ...axisCards(full.axes),
      ...full.cards,
    ],
    columns: [...before, flux, ...columnsOf(full.columnsAfter, rows)],
  });
}

function columnsOf(columns: UvSpec["columns"], rows: readonly number[]): ColumnToWrite[] {
  return Object.entries(columns).flatMap(([name, column]) => {
    if (column === undefined) return [];
    const { form, cell, unit, keywords } = column;
    const more = { ...(unit === undefined ? {} : { unit }), ...(keywords === undefined ? {} : { keywords }) };
    return [{ name, form, cells: rows.map(cell), ...more }];
  });
}

export function axisCards(axes: readonly AxisToWrite[]): CardToWrite[] {
  return axes.flatMap(({ type, length, value, step, pixel }, i) => [
    card(`MAXIS${i + 1}`, length),
    card(`CTYPE${i + 1}`, type),
    card(`CRVAL${i + 1}`, real(value)),
    card(`CDELT${i + 1}`, real(step)),
    card(`CRPIX${i + 1}`, real(pixel ?? 1)),
  ]);
}

function matrixOf({ axes, stored }: UvSpec, row: number, elements: number): number[] {
  return Array.from({ length: elements }, (_, element) => {
    const at: Record<string, number> = {};
    let rest = element;
    for (const { type, length } of axes) {
      at[type] = rest % length;
      rest = Math.floor(rest / length);
    }
    return stored(row, at);
  });
}

export interface GeometrySpec {
  readonly version?: number;
  readonly cards?: readonly CardToWrite[];
  readonly names?: readonly string[];
  readonly numbers?: readonly number[];
  readonly positions?: readonly (readonly [number, number, number])[];
}

export const GEOMETRY_CARDS: readonly CardToWrite[] = [
  card("ARRAYX", real(0)),
  card("ARRAYY", real(0)),
  card("ARRAYZ", real(0)),
  card("ARRNAM", "Ridge"),
  card("RDATE", "2024-06-15"),
  card("FRAME", "GEOCENTRIC"),
  card("TIMSYS", "UTC"),
  card("TIMESYS", "UTC"),
  card("GSTIA0", real(263.5)),
  card("DEGPDY", real(360.9856449733)),
  card("UT1UTC", real(-0.1)),
  card("IATUTC", real(37)),
];

/** Three antennas near the equator at longitude 0. */
export function geometry(spec: GeometrySpec = {}): Uint8Array {
  const names = spec.names ?? ["ANT1", "ANT2", "ANT3"];
  const positions = spec.positions ?? [
    [6378000, 0, 0],
    [6378000, 100, 0],
    [6378000, 0, 250],
  ];
  return binaryTable({
    name: "ARRAY_GEOMETRY",
    version: spec.version ?? 1,
    cards: spec.cards ?? GEOMETRY_CARDS,
    columns: [
      { name: "ANNAME", form: "8A", cells: names },
      { name: "STABXYZ", form: "3D", unit: "METERS", cells: positions },
      { name: "DERXYZ", form: "3E", cells: names.map(() => [0, 0, 0]) },
      { name: "ORBPARM", form: "0D", cells: names.map(() => []) },
      { name: "NOSTA", form: "1J", cells: spec.numbers ?? names.map((_, i) => i + 1) },
      { name: "MNTSTA", form: "1J", cells: names.map(() => 0) },
      { name: "STAXOF", form: "3E", cells: names.map(() => [0, 0, 0]) },
      { name: "DIAMETER", form: "1E", cells: names.map(() => 25) },
    ],
  });
}

export interface AntennaRow {
  readonly name: string;
  readonly number: number;
  readonly array?: number;
}

export function antennas(
  rows: readonly AntennaRow[] = [1, 2, 3].map((number) => ({ name: `ANT${number}`, number })),
): Uint8Array {
  return binaryTable({
    name: "ANTENNA",
    columns: [
      { name: "TIME", form: "1D", cells: rows.map(() => 0.5) },
      { name: "TIME_INTERVAL", form: "1E", cells: rows.map(() => 1) },
      { name: "ANNAME", form: "8A", cells: rows.map(({ name }) => name) },
      { name: "ANTENNA_NO", form: "1J", cells: rows.map(({ number }) => number) },
      { name: "ARRAY", form: "1J", cells: rows.map(({ array }) => array ?? 1) },
      { name: "FREQID", form: "1J", cells: rows.map(() => 1) },
      { name: "POLTYA", form: "1A", cells: rows.map(() => "R") },
    ],
  });
}

export interface FrequencySpec {
  readonly ids?: readonly number[];
  readonly offsets?: readonly (readonly number[])[];
  readonly widths?: readonly (readonly number[])[];
  readonly sidebands?: readonly (readonly number[])[];
  readonly cards?: readonly CardToWrite[];
}

/** Two sub-bands, 1.4 and 1.5 GHz, of 1 MHz channels. */
export function frequency(spec: FrequencySpec = {}): Uint8Array {
  const ids = spec.ids ?? [1];
  const offsets = spec.offsets ?? ids.map(() => [0, 1e8]);
  const n = offsets[0]!.length;
  const each = (value: number) => ids.map(() => Array<number>(n).fill(value));
  return binaryTable({
    name: "FREQUENCY",
    cards: spec.cards ?? [],
    columns: [
      { name: "FREQID", form: "1J", cells: [...ids] },
      { name: "BANDFREQ", form: `${n}D`, unit: "HZ", cells: offsets },
      { name: "CH_WIDTH", form: `${n}E`, unit: "HZ", cells: spec.widths ?? each(1e6) },
      { name: "TOTAL_BANDWIDTH", form: `${n}E`, unit: "HZ", cells: each(3e6) },
      { name: "SIDEBAND", form: `${n}J`, cells: spec.sidebands ?? each(1) },
    ],
  });
}

export interface SourceRow {
  readonly id: number;
  readonly name: string;
  readonly ra: number;
  readonly dec: number;
}

/** @param names of the column of numbers, and of the equinox with what it holds */
export function source(
  rows: readonly SourceRow[] = [{ id: 1, name: "Field A", ra: 123.5, dec: -30.25 }],
  names: { id?: string; equinox?: readonly [string, string, string | number] | null } = {},
): Uint8Array {
  const equinox = names.equinox === undefined ? (["EQUINOX", "8A", "J2000"] as const) : names.equinox;
  return binaryTable({
    name: "SOURCE",
    columns: [
      { name: names.id ?? "SOURCE_ID", form: "1J", cells: rows.map(({ id }) => id) },
      { name: "SOURCE", form: "16A", cells: rows.map(({ name }) => name) },
      { name: "RAEPO", form: "1D", unit: "DEGREES", cells: rows.map(({ ra }) => ra) },
      { name: "DECEPO", form: "1D", unit: "DEGREES", cells: rows.map(({ dec }) => dec) },
      ...(equinox === null
        ? []
        : [{ name: equinox[0], form: equinox[1], cells: rows.map(() => equinox[2]) }]),
    ],
  });
}

export const primary = headerBlocks([
  card("SIMPLE", true),
  card("BITPIX", 8),
  card("NAXIS", 0),
  card("EXTEND", true),
  card("GROUPS", true),
  card("GCOUNT", 0),
  card("PCOUNT", 0),
]);

/** The tables of the plain file, in usual order. */
export function usualTables(): Uint8Array[] {
  return [geometry(), antennas(), frequency(), source()];
}

/** The plain file, with other visibilities where `spec` says so. */
export function idiFile(spec: Partial<UvSpec> = {}, tables = usualTables()): Buffer {
  return Buffer.concat([primary, ...tables, uvData(spec)]);
}
