/**
 * The small tables that a FLAG table refers to: ARRAY_GEOMETRY, ANTENNA, FREQUENCY and SOURCE, and the keywords that all
 * tables share. FITS Interferometry Data Interchange Convention (columns recalled; see the published sample header).
 */
import { dateFromMjd } from "../../util/dates.ts";
import type { Dataset, Polarization, Setup } from "../dataset.ts";
import {
  binaryTable,
  type CardToWrite,
  type CellToWrite,
  type ColumnToWrite,
  card,
  real,
} from "../fits/write.ts";
import { ascii } from "../fits/write-header.ts";

const DEGREES = 180 / Math.PI;
const NAME_LENGTH = 8;
const SOURCE_LENGTH = 16;

/** Codes of the Stokes axis (FITS Standard 4.0, table 29). */
export const STOKES_CODES: Readonly<Record<Polarization, number>> = {
  I: 1,
  Q: 2,
  U: 3,
  V: 4,
  RR: -1,
  LL: -2,
  RL: -3,
  LR: -4,
  XX: -5,
  YY: -6,
  XY: -7,
  YX: -8,
};
const FAMILIES: readonly (readonly Polarization[])[] = [
  ["I", "Q", "U", "V"],
  ["RR", "LL", "RL", "LR"],
  ["XX", "YY", "XY", "YX"],
];

/**
 * The products as STK_1 and NO_STKD can name them: consecutive codes. Those of the dataset where they are, else their
 * whole family; undefined where they are of several.
 */
export function namedProducts(polarizations: readonly Polarization[]): readonly Polarization[] | undefined {
  const family = FAMILIES.find((members) => polarizations.every((name) => members.includes(name)));
  const first = family?.indexOf(polarizations[0]!) ?? -1;
  const consecutive = polarizations.every((name, i) => family?.[first + i] === name);
  return consecutive ? polarizations : family;
}

export interface Reference {
  /** MJD of 0h of RDATE */
  readonly day: number;
  readonly products: readonly Polarization[];
}

export function sharedCards(dataset: Dataset, { day, products }: Reference): CardToWrite[] {
  const { shape, setups } = dataset;
  return [
    card("OBSCODE", ""),
    card("NO_STKD", products.length),
    card("STK_1", STOKES_CODES[products[0]!]),
    card("NO_BAND", shape.subbands),
    card("NO_CHAN", shape.channels),
    card("REF_FREQ", real(setups[0]!.frequencies[0]!), "Hz"),
    card("CHAN_BW", real(setups[0]!.channelWidths[0]!), "Hz"),
    card("REF_PIXL", real(1)),
    card("RDATE", dateFromMjd(day)),
  ];
}

export function arrayGeometry(dataset: Dataset, reference: Reference): Uint8Array {
  const { array } = dataset;
  const { antennas } = array;
  const nowhere = [Number.NaN, Number.NaN, Number.NaN];
  return binaryTable({
    name: "ARRAY_GEOMETRY",
    cards: [
      card("TABREV", 1),
      ...sharedCards(dataset, reference),
      card("ARRNAM", ascii(array.name)),
      card("FRAME", array.frame === "geocentric" ? "GEOCENTRIC" : "????"),
      card("ARRAYX", real(0), "m"),
      card("ARRAYY", real(0), "m"),
      card("ARRAYZ", real(0), "m"),
      card("NUMORB", 0),
      card("FREQ", real(dataset.setups[0]!.frequencies[0]!), "Hz"),
      card("TIMSYS", "UTC"),
      card("TIMESYS", "UTC"),
      card("GSTIA0", real(siderealTime(dataset, reference.day)), "deg, at 0h of RDATE"),
      card("DEGPDY", real(array.degreesPerDay), "deg a day"),
      card("UT1UTC", real(array.ut1MinusUtc), "s"),
      card("IATUTC", real(0), "s"),
      card("POLARX", real(0), "arcsec"),
      card("POLARY", real(0), "arcsec"),
    ],
    columns: [
      text(
        "ANNAME",
        NAME_LENGTH,
        antennas.map(({ name }) => name),
      ),
      {
        name: "STABXYZ",
        form: "3D",
        unit: "METERS",
        cells: antennas.map(({ position }) => position ?? nowhere),
      },
      { name: "DERXYZ", form: "3E", unit: "M/SEC", cells: antennas.map(() => [0, 0, 0]) },
      { name: "ORBPARM", form: "0D", cells: antennas.map(() => []) },
      { name: "NOSTA", form: "1J", cells: antennas.map(({ number }) => number) },
      { name: "MNTSTA", form: "1J", cells: antennas.map(() => 0) },
      { name: "STAXOF", form: "3E", unit: "METERS", cells: antennas.map(() => [0, 0, 0]) },
      { name: "DIAMETER", form: "1E", unit: "METERS", cells: antennas.map(({ diameter }) => diameter ?? 0) },
    ],
  });
}

/** GSTIA0 belongs to 0h of RDATE; 0 where the dataset has none. */
function siderealTime({ array }: Dataset, day: number): number {
  const { siderealTimeAtReference, referenceDay, degreesPerDay } = array;
  if (siderealTimeAtReference === null || referenceDay === null) return 0;
  const angle = siderealTimeAtReference + (day - referenceDay) * degreesPerDay;
  return angle - 360 * Math.floor(angle / 360);
}

export function antennaTable(dataset: Dataset, reference: Reference): Uint8Array {
  const { antennas } = dataset.array;
  const bands = dataset.shape.subbands;
  const hands = /[XY]/.test(reference.products[0]!) ? ["X", "Y"] : ["R", "L"];
  const each = (name: string, form: string, cell: CellToWrite, unit?: string): ColumnToWrite => ({
    name,
    form,
    ...(unit === undefined ? {} : { unit }),
    cells: antennas.map(() => cell),
  });
  return binaryTable({
    name: "ANTENNA",
    cards: [card("TABREV", 1), ...sharedCards(dataset, reference), card("NOPCAL", 0), card("POLTYPE", "")],
    columns: [
      each("TIME", "1D", 0.5, "DAYS"),
      each("TIME_INTERVAL", "1E", 1, "DAYS"),
      text(
        "ANNAME",
        NAME_LENGTH,
        antennas.map(({ name }) => name),
      ),
      { name: "ANTENNA_NO", form: "1J", cells: antennas.map(({ number }) => number) },
      each("ARRAY", "1J", 1),
      each("FREQID", "1J", 1),
      each("NO_LEVELS", "1J", 0),
      each("POLTYA", "1A", hands[0]!),
      each("POLAA", `${bands}E`, Array(bands).fill(0), "DEGREES"),
      each("POLTYB", "1A", hands[1]!),
      each("POLAB", `${bands}E`, Array(bands).fill(0), "DEGREES"),
    ],
  });
}

export function frequencyTable(dataset: Dataset, reference: Reference): Uint8Array {
  const { setups, shape } = dataset;
  const { subbands, channels } = shape;
  const start = setups[0]!.frequencies[0]!;
  const bands = (of: (setup: Setup, band: number) => number) =>
    setups.map((setup) => Array.from({ length: subbands }, (_, band) => of(setup, band)));
  const first = ({ frequencies }: Setup, band: number) => frequencies[band * channels]!;
  return binaryTable({
    name: "FREQUENCY",
    cards: [card("TABREV", 2), ...sharedCards(dataset, reference)],
    columns: [
      { name: "FREQID", form: "1J", cells: setups.map(({ id }) => id) },
      {
        name: "BANDFREQ",
        form: `${subbands}D`,
        unit: "HZ",
        cells: bands((setup, band) => first(setup, band) - start),
      },
      {
        name: "CH_WIDTH",
        form: `${subbands}E`,
        unit: "HZ",
        cells: bands(({ channelWidths }, band) => channelWidths[band]!),
      },
      {
        name: "TOTAL_BANDWIDTH",
        form: `${subbands}E`,
        unit: "HZ",
        cells: bands(({ channelWidths }, band) => channels * channelWidths[band]!),
      },
      {
        name: "SIDEBAND",
        form: `${subbands}J`,
        cells: bands((setup, band) => {
          const next = channels > 1 ? setup.frequencies[band * channels + 1]! : Number.POSITIVE_INFINITY;
          return next >= first(setup, band) ? 1 : -1;
        }),
      },
    ],
  });
}

export function sourceTable(dataset: Dataset, reference: Reference): Uint8Array {
  const { fields } = dataset;
  return binaryTable({
    name: "SOURCE",
    cards: [card("TABREV", 1), ...sharedCards(dataset, reference)],
    columns: [
      { name: "SOURCE_ID", form: "1J", cells: fields.map(({ id }) => id) },
      text(
        "SOURCE",
        SOURCE_LENGTH,
        fields.map(({ name }) => name),
      ),
      { name: "QUAL", form: "1J", cells: fields.map(() => 0) },
      text(
        "CALCODE",
        4,
        fields.map(() => ""),
      ),
      { name: "FREQID", form: "1J", cells: fields.map(() => 1) },
      {
        name: "RAEPO",
        form: "1D",
        unit: "DEGREES",
        cells: fields.map((field) => field.rightAscension * DEGREES),
      },
      {
        name: "DECEPO",
        form: "1D",
        unit: "DEGREES",
        cells: fields.map((field) => field.declination * DEGREES),
      },
      text(
        "EQUINOX",
        8,
        fields.map(({ equinox }) =>
          equinox === 1950 ? "B1950" : Number.isNaN(equinox) ? "" : `J${equinox}`,
        ),
      ),
    ],
  });
}

function text(name: string, width: number, texts: readonly string[]): ColumnToWrite {
  return { name, form: `${width}A`, cells: texts.map((one) => ascii(one).slice(0, width)) };
}
