/**
 * The small tables of a FITS-IDI file: ARRAY_GEOMETRY, ANTENNA, FREQUENCY and SOURCE, and the keywords that all tables
 * share. By the convention registered with the FITS Support Office (Greisen 2011, recalled; keywords as in the sample
 * header published with it). Every value goes through unchanged: names as long as they are, numbers in double precision
 * where single would lose digits.
 */
import { dateFromMjd, isoFromMjd } from "../../util/dates.ts";
import type { Dataset, Polarization, Setup } from "../dataset.ts";
import {
  binaryTable,
  type CardToWrite,
  type CellToWrite,
  type ColumnToWrite,
  card,
  real,
} from "../fits/write.ts";

const DEGREE = Math.PI / 180;
/** Alt-azimuth. */
const MOUNT = 0;
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
  /** as STK_1 and NO_STKD name them */
  readonly products: readonly Polarization[];
}

/** Step between channels for the axis, Hz; 0 where the dataset has none. */
export function channelStep({ setups }: Dataset): number {
  const width = setups[0]!.channelWidths[0]!;
  return Number.isFinite(width) ? width : 0;
}

export function sharedCards(dataset: Dataset, { day, products }: Reference): CardToWrite[] {
  const { shape, setups } = dataset;
  return [
    card("TABREV", 2, "revision of the table"),
    card("NO_STKD", products.length, "products"),
    card("STK_1", STOKES_CODES[products[0]!], "code of the first"),
    card("NO_BAND", shape.subbands, "sub-bands"),
    card("NO_CHAN", shape.channels, "channels"),
    card("REF_FREQ", real(setups[0]!.frequencies[0]!), "Hz"),
    card("CHAN_BW", real(channelStep(dataset)), "Hz"),
    card("REF_PIXL", real(1)),
    card("OBSCODE", ""),
    card("RDATE", Number.isInteger(day) ? dateFromMjd(day) : isoFromMjd(day, { seconds: 6 })),
  ];
}

/** One table an array; all list the same antennas. */
export function arrayGeometry(dataset: Dataset, reference: Reference, subarray = 1): Uint8Array {
  const { array, setups } = dataset;
  const { antennas } = array;
  const nowhere = [Number.NaN, Number.NaN, Number.NaN];
  const each = eachOf(antennas.length);
  const start = siderealTime(dataset, reference.day);
  return binaryTable({
    name: "ARRAY_GEOMETRY",
    version: subarray,
    cards: [
      ...sharedCards(dataset, reference),
      card("FRAME", array.frame === "geocentric" ? "GEOCENTRIC" : "????"),
      card("ARRAYX", real(0), "m"),
      card("ARRAYY", real(0), "m"),
      card("ARRAYZ", real(0), "m"),
      card("ARRNAM", array.name),
      card("NUMORB", 0),
      card("FREQ", real(setups[0]!.frequencies[0]!), "Hz"),
      card("TIMSYS", "UTC"),
      card("TIMESYS", "UTC"),
      ...(start === null
        ? []
        : [card("GSTIA0", real(start), "deg, sidereal time at Greenwich, 0h of RDATE")]),
      card("DEGPDY", real(array.degreesPerDay), "deg a day, rotation of the Earth"),
      card("UT1UTC", real(array.ut1MinusUtc), "s"),
      card("IATUTC", real(0), "s, not used with UTC"),
      card("POLARX", real(0), "arcsec"),
      card("POLARY", real(0), "arcsec"),
    ],
    columns: [
      text(
        "ANNAME",
        8,
        antennas.map(({ name }) => name),
      ),
      {
        name: "STABXYZ",
        form: "3D",
        unit: "METERS",
        cells: antennas.map(({ position }) => position ?? nowhere),
      },
      each("DERXYZ", "3E", [0, 0, 0], "M/SEC"),
      each("ORBPARM", "0D", []),
      { name: "NOSTA", form: "1J", cells: antennas.map(({ number }) => number) },
      each("MNTSTA", "1J", MOUNT),
      each("STAXOF", "3E", [0, 0, 0], "METERS"),
      numbers(
        "DIAMETER",
        "METERS",
        antennas.map(({ diameter }) => [diameter ?? Number.NaN]),
      ),
    ],
  });
}

/** GSTIA0 belongs to 0h of RDATE; null where the dataset has none. */
function siderealTime({ array }: Dataset, day: number): number | null {
  const { siderealTimeAtReference, referenceDay, degreesPerDay } = array;
  if (siderealTimeAtReference === null || referenceDay === null) return siderealTimeAtReference;
  if (day === referenceDay) return siderealTimeAtReference;
  const angle = siderealTimeAtReference + (day - referenceDay) * degreesPerDay;
  return angle - 360 * Math.floor(angle / 360);
}

/**
 * A row for each antenna of each array and frequency setup, for the whole time.
 *
 * @param times of the first and last row, MJD; NaN where there is none
 */
export function antennaTable(
  dataset: Dataset,
  reference: Reference,
  subarrays: readonly number[] = [1],
  times: readonly [number, number] = [Number.NaN, Number.NaN],
): Uint8Array {
  const { array, setups, shape } = dataset;
  const rows = subarrays.flatMap((subarray) =>
    setups.flatMap(({ id }) => array.antennas.map((antenna) => ({ antenna, subarray, setup: id }))),
  );
  const { day, products } = reference;
  const [start, end] = times.every(Number.isFinite) ? times : [day, day + 1];
  const linear = /[XY]/.test(products[0]!);
  const each = eachOf(rows.length);
  const perSubband = (value: number) => new Array<number>(shape.subbands).fill(value);
  const angles = `${shape.subbands}E`;
  return binaryTable({
    name: "ANTENNA",
    cards: [...sharedCards(dataset, reference), card("NOPCAL", 0), card("POLTYPE", "")],
    columns: [
      each("TIME", "1D", (start + end) / 2 - day, "DAYS"),
      // With a day to spare on either side: it holds for all rows.
      each("TIME_INTERVAL", "1E", end - start + 2, "DAYS"),
      text(
        "ANNAME",
        8,
        rows.map(({ antenna }) => antenna.name),
      ),
      { name: "ANTENNA_NO", form: "1J", cells: rows.map(({ antenna }) => antenna.number) },
      { name: "ARRAY", form: "1J", cells: rows.map(({ subarray }) => subarray) },
      { name: "FREQID", form: "1J", cells: rows.map(({ setup }) => setup) },
      each("NO_LEVELS", "1J", 0),
      each("POLTYA", "1A", linear ? "X" : "R"),
      each("POLAA", angles, perSubband(0), "DEGREES"),
      each("POLCALA", "0E", []),
      each("POLTYB", "1A", linear ? "Y" : "L"),
      each("POLAB", angles, perSubband(linear ? 90 : 0), "DEGREES"),
      each("POLCALB", "0E", []),
    ],
  });
}

export function frequencyTable(dataset: Dataset, reference: Reference): Uint8Array {
  const { shape, setups } = dataset;
  const { subbands, channels } = shape;
  const start = setups[0]!.frequencies[0]!;
  const bySubband = (value: (setup: Setup, subband: number) => number) =>
    setups.map((setup) => Array.from({ length: subbands }, (_, subband) => value(setup, subband)));
  return binaryTable({
    name: "FREQUENCY",
    cards: sharedCards(dataset, reference),
    columns: [
      { name: "FREQID", form: "1J", cells: setups.map(({ id }) => id) },
      {
        name: "BANDFREQ",
        form: `${subbands}D`,
        unit: "HZ",
        cells: bySubband(({ frequencies }, i) => frequencies[i * channels]! - start),
      },
      numbers(
        "CH_WIDTH",
        "HZ",
        bySubband(({ channelWidths }, i) => channelWidths[i]!),
      ),
      numbers(
        "TOTAL_BANDWIDTH",
        "HZ",
        bySubband(({ channelWidths }, i) => channels * channelWidths[i]!),
      ),
      {
        name: "SIDEBAND",
        form: `${subbands}J`,
        cells: bySubband((setup, i) => direction(setup, i, channels)),
      },
      { name: "BB_CHAN", form: `${subbands}J`, cells: bySubband(() => 0) },
    ],
  });
}

/** 1 where frequency rises with the channel, else -1. */
export function direction({ frequencies }: Setup, subband: number, channels: number): number {
  const at = subband * channels;
  return channels > 1 && frequencies[at + 1]! < frequencies[at]! ? -1 : 1;
}

export function sourceTable(dataset: Dataset, reference: Reference): Uint8Array {
  const { fields, shape } = dataset;
  const each = eachOf(fields.length);
  const zeros = new Array<number>(shape.subbands).fill(0);
  const perSubband = (name: string, code: "E" | "D", unit: string) =>
    each(name, `${shape.subbands}${code}`, zeros, unit);
  const degrees = (name: string, angles: readonly number[]): ColumnToWrite => ({
    name,
    form: "1D",
    unit: "DEGREES",
    cells: angles.map(degreesOf),
  });
  const right = fields.map(({ rightAscension }) => rightAscension);
  const up = fields.map(({ declination }) => declination);
  return binaryTable({
    name: "SOURCE",
    cards: sharedCards(dataset, reference),
    columns: [
      { name: "SOURCE_ID", form: "1J", cells: fields.map(({ id }) => id) },
      text(
        "SOURCE",
        16,
        fields.map(({ name }) => name),
      ),
      each("QUAL", "1J", 0),
      each("CALCODE", "4A", ""),
      each("FREQID", "1J", dataset.setups.length === 1 ? dataset.setups[0]!.id : 0),
      perSubband("IFLUX", "E", "JY"),
      perSubband("QFLUX", "E", "JY"),
      perSubband("UFLUX", "E", "JY"),
      perSubband("VFLUX", "E", "JY"),
      perSubband("ALPHA", "E", ""),
      perSubband("FREQOFF", "E", "HZ"),
      degrees("RAEPO", right),
      degrees("DECEPO", up),
      text(
        "EQUINOX",
        8,
        fields.map(({ equinox }) => equinoxText(equinox)),
      ),
      degrees("RAAPP", right),
      degrees("DECAPP", up),
      perSubband("SYSVEL", "D", "M/SEC"),
      each("VELTYP", "8A", "TOPOCENT"),
      each("VELDEF", "8A", "RADIO"),
      perSubband("RESTFREQ", "D", "HZ"),
      each("PMRA", "1D", 0, "DEG/DAY"),
      each("PMDEC", "1D", 0, "DEG/DAY"),
      each("PARALLAX", "1E", 0, "ARCSEC"),
    ],
  });
}

/** Besselian before 1984, as catalogues have it (IAU resolutions of 1976, in use from 1984); empty for an unknown one. */
export function equinoxText(equinox: number): string {
  if (Number.isNaN(equinox)) return "";
  return `${equinox < 1984 ? "B" : "J"}${equinox}`;
}

/** Degrees that a reader turns into the same radians, to the last bit where there are such. */
export function degreesOf(radians: number): number {
  const near = radians / DEGREE;
  const ulp = Math.abs(near) * Number.EPSILON;
  const candidates = [near, near + ulp, near - ulp, near + 2 * ulp, near - 2 * ulp];
  return candidates.find((degrees) => degrees * DEGREE === radians) ?? near;
}

/** A column of one value for all rows. */
function eachOf(rows: number) {
  return (name: string, form: string, cell: CellToWrite, unit?: string): ColumnToWrite => ({
    name,
    form,
    ...(unit === undefined || unit === "" ? {} : { unit }),
    cells: new Array<CellToWrite>(rows).fill(cell),
  });
}

/** As wide as the longest needs, and no narrower than usual. */
function text(name: string, usual: number, cells: readonly string[]): ColumnToWrite {
  const longest = Math.max(usual, ...cells.map((cell) => cell.length));
  return { name, form: `${longest}A`, cells };
}

/** Single precision, as the format has it, unless that would lose digits. */
function numbers(name: string, unit: string, cells: readonly (readonly number[])[]): ColumnToWrite {
  const single = cells.every((cell) => cell.every((value) => Object.is(Math.fround(value), value)));
  return { name, form: `${cells[0]?.length ?? 1}${single ? "E" : "D"}`, unit, cells };
}
