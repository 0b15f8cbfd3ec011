/** The tables of a random-groups file: antennas (AN), frequencies (FQ), sources (SU). Found by the last word of EXTNAME. */
import type { Dataset } from "../dataset/dataset.ts";
import { binaryTable, type CellToWrite, type ColumnToWrite, card, real } from "../dataset/fits/write.ts";
import { dateFromMjd } from "../util/dates.ts";

const DEGREES = 180 / Math.PI;

/** Alt-azimuth. */
const MOUNT = 0;

export function antennaTable(dataset: Dataset): Uint8Array {
  const { array, polarizations, setups } = dataset;
  const hands = /[XY]/.test(polarizations[0]!) ? ["X", "Y"] : ["R", "L"];
  const { antennas } = array;
  const each = (name: string, form: string, cell: CellToWrite, unit?: string): ColumnToWrite => ({
    name,
    form,
    ...(unit === undefined ? {} : { unit }),
    cells: antennas.map(() => cell),
  });
  const nowhere = [Number.NaN, Number.NaN, Number.NaN];
  return binaryTable({
    name: "VISVET AN",
    cards: [
      card("ARRAYX", real(0), "m"),
      card("ARRAYY", real(0), "m"),
      card("ARRAYZ", real(0), "m"),
      card(
        "GSTIA0",
        real(array.siderealTimeAtReference ?? 0),
        "deg, sidereal time at Greenwich, 0h of RDATE",
      ),
      card("DEGPDY", real(array.degreesPerDay), "deg a day, rotation of the Earth"),
      card("FREQ", real(setups[0]!.frequencies[0]!), "Hz"),
      card("RDATE", dateFromMjd(array.referenceDay ?? 0)),
      card("POLARX", real(0), "arcsec"),
      card("POLARY", real(0), "arcsec"),
      card("UT1UTC", real(array.ut1MinusUtc), "s"),
      card("DATUTC", real(0), "s"),
      card("TIMSYS", "UTC"),
      card("ARRNAM", array.name),
      card("XYZHAND", "RIGHT"),
      card("FRAME", array.frame === "geocentric" ? "GEOCENTRIC" : "????"),
      card("NUMORB", 0),
      card("NOPCAL", 0),
      card("NO_IF", dataset.shape.subbands),
      card("FREQID", -1),
    ],
    columns: [
      { name: "ANNAME", form: "8A", cells: antennas.map(({ name }) => name.slice(0, 8)) },
      {
        name: "STABXYZ",
        form: "3D",
        unit: "METERS",
        cells: antennas.map(({ position }) => position ?? nowhere),
      },
      each("ORBPARM", "0D", []),
      { name: "NOSTA", form: "1J", cells: antennas.map(({ number }) => number) },
      each("MNTSTA", "1J", MOUNT),
      each("STAXOF", "1E", 0, "METERS"),
      {
        name: "DIAMETER",
        form: "1E",
        unit: "METERS",
        cells: antennas.map(({ diameter }) => diameter ?? Number.NaN),
      },
      each("POLTYA", "1A", hands[0]!),
      each("POLAA", "1E", 0, "DEGREES"),
      each("POLTYB", "1A", hands[1]!),
      each("POLAB", "1E", hands[0] === "X" ? 90 : 0, "DEGREES"),
    ],
  });
}

export function frequencyTable(dataset: Dataset): Uint8Array {
  const { shape, setups } = dataset;
  const { frequencies, channelWidths } = setups[0]!;
  const { subbands, channels } = shape;
  const falls = channels > 1 && frequencies[1]! < frequencies[0]!;
  const each = (value: (subband: number) => number) => Array.from({ length: subbands }, (_, i) => value(i));
  return binaryTable({
    name: "VISVET FQ",
    cards: [card("NO_IF", subbands)],
    columns: [
      { name: "FRQSEL", form: "1J", cells: [1] },
      {
        name: "IF FREQ",
        form: `${subbands}D`,
        unit: "HZ",
        cells: [each((i) => frequencies[i * channels]! - frequencies[0]!)],
      },
      {
        name: "CH WIDTH",
        form: `${subbands}E`,
        unit: "HZ",
        // The sign stands in CDELT, CH WIDTH and SIDEBAND alike: they say one thing.
        cells: [each((i) => (falls ? -channelWidths[i]! : channelWidths[i]!))],
      },
      {
        name: "TOTAL BANDWIDTH",
        form: `${subbands}E`,
        unit: "HZ",
        cells: [each((i) => channels * channelWidths[i]!)],
      },
      { name: "SIDEBAND", form: `${subbands}J`, cells: [each(() => (falls ? -1 : 1))] },
    ],
  });
}

export function sourceTable(dataset: Dataset): Uint8Array {
  const { fields, shape, setups } = dataset;
  const { subbands, channels } = shape;
  const zeros = new Array<number>(subbands).fill(0);
  const each = (name: string, form: string, cell: CellToWrite, unit?: string): ColumnToWrite => ({
    name,
    form,
    ...(unit === undefined ? {} : { unit }),
    cells: fields.map(() => cell),
  });
  const perSubband = (name: string, code: string, unit: string) =>
    each(name, `${subbands}${code}`, zeros, unit);
  const degrees = (name: string, value: (field: Dataset["fields"][number]) => number): ColumnToWrite => ({
    name,
    form: "1D",
    unit: "DEGREES",
    cells: fields.map((field) => value(field) * DEGREES),
  });
  return binaryTable({
    name: "VISVET SU",
    cards: [card("NO_IF", subbands), card("VELTYP", "TOPOCENT"), card("VELDEF", "RADIO"), card("FREQID", -1)],
    columns: [
      { name: "ID. NO.", form: "1J", cells: fields.map(({ id }) => id) },
      { name: "SOURCE", form: "16A", cells: fields.map(({ name }) => name.slice(0, 16)) },
      each("QUAL", "1J", 0),
      each("CALCODE", "4A", ""),
      perSubband("IFLUX", "E", "JY"),
      perSubband("QFLUX", "E", "JY"),
      perSubband("UFLUX", "E", "JY"),
      perSubband("VFLUX", "E", "JY"),
      perSubband("FREQOFF", "D", "HZ"),
      each("BANDWIDTH", "1D", channels * setups[0]!.channelWidths[0]!, "HZ"),
      degrees("RAEPO", ({ rightAscension }) => rightAscension),
      degrees("DECEPO", ({ declination }) => declination),
      { name: "EPOCH", form: "1D", unit: "YEARS", cells: fields.map(({ equinox }) => equinox) },
      degrees("RAAPP", ({ rightAscension }) => rightAscension),
      degrees("DECAPP", ({ declination }) => declination),
      perSubband("LSRVEL", "D", "M/SEC"),
      perSubband("RESTFREQ", "D", "HZ"),
      each("PMRA", "1D", 0, "DEG/DAY"),
      each("PMDEC", "1D", 0, "DEG/DAY"),
    ],
  });
}
