/** Random-groups files made to measure, bytes and truth, for the tests of reading. */
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll } from "vitest";
import {
  type AxisToWrite,
  bigEndian,
  binaryTable,
  type CardToWrite,
  card,
  dataPadding,
  groupItems,
  groupsHeader,
  type ParameterToWrite,
  real,
} from "../../src/dataset/fits/write.ts";

export interface ParameterSpec extends ParameterToWrite {
  /** as stored */
  readonly stored: (row: number) => number;
}

export interface GroupFileSpec {
  readonly bitpix: 8 | 16 | 32 | 64 | -32 | -64;
  readonly rows: number;
  /** first axis fastest */
  readonly axes: readonly AxisToWrite[];
  readonly parameters: readonly ParameterSpec[];
  /** stored value of an element by the index (from 0) on each axis type; "" for the unnamed axis */
  readonly stored: (row: number, at: Readonly<Record<string, number>>) => number;
  readonly cards: readonly CardToWrite[];
  readonly tables: readonly Uint8Array[];
}

export const COMPLEX: AxisToWrite = { type: "COMPLEX", length: 3, value: 1, step: 1 };
export const RA: AxisToWrite = { type: "RA", length: 1, value: 123.5, step: 1 };
export const DEC: AxisToWrite = { type: "DEC", length: 1, value: -30.25, step: 1 };

export function stokes(length: number, value = -1, step = -1): AxisToWrite {
  return { type: "STOKES", length, value, step };
}

export function freq(length: number, value = 1.4e9, step = 1e6): AxisToWrite {
  return { type: "FREQ", length, value, step };
}

export function subbands(length: number): AxisToWrite {
  return { type: "IF", length, value: 1, step: 1 };
}

/** A number for each element that float32 holds exactly, telling all indices apart; weights are positive. */
export function marker(row: number, at: Readonly<Record<string, number>>): number {
  const sample = ((row * 8 + (at.IF ?? 0)) * 16 + (at.FREQ ?? 0)) * 4 + (at.STOKES ?? 0);
  return sample * 4 + (at.COMPLEX ?? 0) + 1;
}

/** 2024-06-15 0h. */
export const DAY = 60476;

export const parameters: Readonly<Record<string, ParameterSpec>> = {
  uu: { name: "UU---SIN", scale: 1e-9, stored: (row) => row + 1 },
  vv: { name: "VV---SIN", scale: 1e-9, stored: (row) => -row - 2 },
  ww: { name: "WW---SIN", scale: 1e-9, stored: (row) => row / 2 },
  baseline: { name: "BASELINE", stored: (row) => 256 * (1 + (row % 2)) + 3 },
  date: { name: "DATE", zero: DAY + 2400000.5, stored: () => 0 },
  date2: { name: "DATE", stored: (row) => 0.25 + Math.floor(row / 2) / 1024 },
};

/** A plain file of four rows, two sub-bands, three channels and two polarizations, with every table. */
export const plainSpec: GroupFileSpec = {
  bitpix: -32,
  rows: 4,
  axes: [COMPLEX, stokes(2), freq(3), subbands(2), RA, DEC],
  parameters: Object.values(parameters),
  stored: marker,
  cards: [
    card("OBJECT", "Field A"),
    card("TELESCOP", "Invented"),
    card("DATE-OBS", "2024-06-15"),
    card("BUNIT", "JY"),
    card("EQUINOX", real(2000)),
  ],
  tables: [],
};

/** Bytes of the file that `spec` says. */
export function groupFile(spec: Partial<GroupFileSpec> = {}): Buffer {
  const full = { ...plainSpec, tables: [antennaTable(), frequencyTable()], ...spec };
  const header = groupsHeader({ ...full, groups: full.rows });
  const data = bigEndian(storedItems(full));
  return Buffer.concat([header, data, dataPadding(data.length), ...full.tables]);
}

type Items = Uint8Array | Int16Array | Int32Array | BigInt64Array | Float32Array | Float64Array;

function storedItems(spec: GroupFileSpec): Items {
  const perGroup = groupItems(spec);
  const all = new Float64Array(spec.rows * perGroup);
  for (let row = 0, i = 0; row < spec.rows; row++) {
    for (const parameter of spec.parameters) all[i++] = parameter.stored(row);
    const elements = perGroup - spec.parameters.length;
    for (let element = 0; element < elements; element++) {
      const at: Record<string, number> = {};
      let rest = element;
      for (const axis of spec.axes) {
        at[axis.type] = rest % axis.length;
        rest = Math.floor(rest / axis.length);
      }
      all[i++] = spec.stored(row, at);
    }
  }
  switch (spec.bitpix) {
    case 8:
      return Uint8Array.from(all);
    case 16:
      return Int16Array.from(all);
    case 32:
      return Int32Array.from(all);
    case 64:
      return BigInt64Array.from(all, (value) => BigInt(Math.round(value)));
    case -32:
      return Float32Array.from(all);
    default:
      return all;
  }
}

export interface AntennaTableSpec {
  readonly name?: string;
  readonly version?: number;
  readonly cards?: readonly CardToWrite[];
  readonly numbers?: readonly number[];
  readonly names?: readonly string[];
  readonly positions?: readonly (readonly [number, number, number])[];
  readonly diameters?: readonly number[];
}

/** Three antennas near the equator at longitude 0, geocentric. */
export function antennaTable(spec: AntennaTableSpec = {}): Uint8Array {
  const numbers = spec.numbers ?? [1, 2, 3];
  const positions = spec.positions ?? [
    [6378000, 0, 0],
    [6378000, 100, 0],
    [6378000, 0, 250],
  ];
  return binaryTable({
    name: spec.name ?? "ARRAY AN",
    version: spec.version ?? 1,
    cards: spec.cards ?? [
      card("ARRAYX", real(0)),
      card("ARRAYY", real(0)),
      card("ARRAYZ", real(0)),
      card("GSTIA0", real(263.5)),
      card("DEGPDY", real(360.9856449733)),
      card("RDATE", "2024-06-15"),
      card("TIMSYS", "UTC"),
      card("ARRNAM", "Ridge"),
    ],
    columns: [
      { name: "ANNAME", form: "8A", cells: spec.names ?? numbers.map((n) => `ANT${n}`) },
      { name: "STABXYZ", form: "3D", unit: "METERS", cells: positions },
      { name: "ORBPARM", form: "0D", cells: numbers.map(() => []) },
      { name: "NOSTA", form: "1J", cells: [...numbers] },
      { name: "DIAMETER", form: "1E", unit: "METERS", cells: spec.diameters ?? numbers.map(() => 25) },
    ],
  });
}

export interface FrequencyTableSpec {
  readonly ids?: readonly number[];
  readonly offsets?: readonly (readonly number[])[];
  readonly widths?: readonly (readonly number[])[];
  readonly sidebands?: readonly (readonly number[])[];
}

/** Two sub-bands, 1.4 and 1.5 GHz, of 1 MHz channels. */
export function frequencyTable(spec: FrequencyTableSpec = {}): Uint8Array {
  const ids = spec.ids ?? [1];
  const offsets = spec.offsets ?? ids.map(() => [0, 1e8]);
  const n = offsets[0]!.length;
  const widths = spec.widths ?? ids.map(() => Array(n).fill(1e6));
  return binaryTable({
    name: "SETUP FQ",
    cards: [card("NO_IF", n)],
    columns: [
      { name: "FRQSEL", form: "1J", cells: [...ids] },
      { name: "IF FREQ", form: `${n}D`, unit: "HZ", cells: offsets },
      { name: "CH WIDTH", form: `${n}E`, unit: "HZ", cells: widths },
      {
        name: "TOTAL BANDWIDTH",
        form: `${n}E`,
        unit: "HZ",
        cells: widths.map((row) => row.map((w) => Math.abs(w) * 3)),
      },
      { name: "SIDEBAND", form: `${n}J`, cells: spec.sidebands ?? ids.map(() => Array(n).fill(1)) },
    ],
  });
}

export interface SourceSpec {
  readonly id: number;
  readonly name: string;
  readonly ra: number;
  readonly dec: number;
  readonly epoch?: number;
}

export function sourceTable(sources: readonly SourceSpec[], idName = "ID. NO."): Uint8Array {
  return binaryTable({
    name: "LIST SU",
    columns: [
      { name: idName, form: "1J", cells: sources.map(({ id }) => id) },
      { name: "SOURCE", form: "16A", cells: sources.map(({ name }) => name) },
      { name: "RAEPO", form: "1D", unit: "DEGREES", cells: sources.map(({ ra }) => ra) },
      { name: "DECEPO", form: "1D", unit: "DEGREES", cells: sources.map(({ dec }) => dec) },
      { name: "EPOCH", form: "1D", unit: "YEARS", cells: sources.map(({ epoch }) => epoch ?? 2000) },
    ],
  });
}

/** Writes files into a folder that goes when the tests of this file are done. */
export function fileMaker(): (bytes: Uint8Array, name?: string) => string {
  const folder = mkdtempSync(join(tmpdir(), "visvet-dataset-"));
  afterAll(() => rmSync(folder, { recursive: true, force: true }));
  let count = 0;
  return (bytes, name = "made.uvfits") => {
    const path = join(folder, `${count++}-${name}`);
    writeFileSync(path, bytes);
    return path;
  };
}
