/** Units of columns, and from what a cell holds to the SI numbers of a dataset. */
import { SECONDS_PER_DAY, SPEED_OF_LIGHT } from "../../util/constants.ts";
import { MJD_EPOCH_JD, mjdFromDate } from "../../util/dates.ts";
import type { ColumnUse, Role } from "./column-map.ts";

const MJD_OF_1970 = 40_587;

/** Seconds of light travel of one unit: a factor, and a divisor where dividing rounds once and not twice. */
const DELAY_UNITS: Readonly<Record<string, readonly [factor: number, divisor: number]>> = {
  s: [1, 1],
  ms: [1, 1e3],
  us: [1, 1e6],
  ns: [1, 1e9],
  ps: [1, 1e12],
  m: [1, SPEED_OF_LIGHT],
  mm: [1, 1e3 * SPEED_OF_LIGHT],
  cm: [1, 1e2 * SPEED_OF_LIGHT],
  km: [1e3, SPEED_OF_LIGHT],
};
/** Wavelengths of one unit. */
const WAVELENGTH_UNITS: Readonly<Record<string, number>> = {
  wavelengths: 1,
  kilowavelengths: 1e3,
  megawavelengths: 1e6,
};
const FREQUENCY_UNITS: Readonly<Record<string, number>> = { Hz: 1, kHz: 1e3, MHz: 1e6, GHz: 1e9, THz: 1e12 };
const DURATION_UNITS: Readonly<Record<string, number>> = {
  s: 1,
  ms: 1e-3,
  us: 1e-6,
  min: 60,
  h: 3600,
  d: SECONDS_PER_DAY,
};
const PHASE_UNITS: Readonly<Record<string, number>> = { rad: 1, deg: Math.PI / 180 };
/** Time of day or since an epoch; "s", "min", "h" and "d" count from `since`. */
const TIME_UNITS = [
  "mjd",
  "jd",
  "mjd_seconds",
  "unix",
  "unix_ms",
  "iso",
  "s",
  "ms",
  "min",
  "h",
  "d",
] as const;

/** The units a role takes; empty: it takes none. */
export function unitsOf(role: Role): readonly string[] {
  switch (role) {
    case "time":
      return TIME_UNITS;
    case "u":
    case "v":
    case "w":
      return [...Object.keys(DELAY_UNITS), ...Object.keys(WAVELENGTH_UNITS)];
    case "frequency":
      return Object.keys(FREQUENCY_UNITS);
    case "integration":
      return Object.keys(DURATION_UNITS);
    case "phase":
      return Object.keys(PHASE_UNITS);
    default:
      return [];
  }
}

export function isWavelengths(unit: string | undefined): boolean {
  return unit !== undefined && Object.hasOwn(WAVELENGTH_UNITS, unit);
}

/** Whether a time in this unit needs to be told since when. */
export function needsEpoch(unit: string | undefined): boolean {
  return unit !== undefined && Object.hasOwn(DURATION_UNITS, unit);
}

/** A function from the numbers of a column to SI: seconds of light travel, wavelengths, Hz, seconds, radians. */
export function toSi(role: Role, { unit, single }: ColumnUse): (value: number) => number {
  const convert = conversion(role, unit);
  return single === true ? (value) => Math.fround(convert(value)) : convert;
}

function conversion(role: Role, unit: string | undefined): (value: number) => number {
  if (unit === undefined) return (value) => value;
  if (role === "u" || role === "v" || role === "w") {
    const [factor, divisor] = DELAY_UNITS[unit] ?? [WAVELENGTH_UNITS[unit]!, 1];
    return (value) => (value * factor) / divisor;
  }
  const table =
    role === "frequency" ? FREQUENCY_UNITS : role === "integration" ? DURATION_UNITS : PHASE_UNITS;
  const factor = table[unit]!;
  return (value) => value * factor;
}

/** A function from the numbers of a time column to MJD, days. */
export function toMjd({ unit, since }: ColumnUse): (value: number) => number {
  switch (unit) {
    case "jd":
      return (value) => value - MJD_EPOCH_JD;
    case "mjd_seconds":
      return (value) => value / SECONDS_PER_DAY;
    case "unix":
      return (value) => MJD_OF_1970 + value / SECONDS_PER_DAY;
    case "unix_ms":
      return (value) => MJD_OF_1970 + value / (1e3 * SECONDS_PER_DAY);
    default: {
      if (!needsEpoch(unit)) return (value) => value;
      const factor = DURATION_UNITS[unit!]!;
      const epoch = since ?? 0;
      return (value) => epoch + (value * factor) / SECONDS_PER_DAY;
    }
  }
}

/** MJD of an ISO 8601 date with or without an offset from UTC; NaN when it is none. */
export function mjdFromIso(text: string): number {
  const match = /^(.*\d)\s*([+-])(\d{2}):?(\d{2})$/.exec(text.trim());
  // A date alone ends in "-17" as an offset might: an offset follows a time.
  if (match === null || !match[1]!.includes(":")) return mjdFromDate(text);
  const minutes = Number(match[3]) * 60 + Number(match[4]);
  return mjdFromDate(match[1]!) - ((match[2] === "-" ? -1 : 1) * minutes) / 1440;
}
