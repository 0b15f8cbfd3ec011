/** Numbers with their units as sentences show them. */
import { isoFromMjd } from "../util/dates.ts";
import {
  formatAngle,
  formatCount,
  formatDuration,
  formatFlux,
  formatFrequency,
  formatLength,
  formatNumber,
  formatPercent,
} from "../util/units.ts";

const FORMATS = {
  "": (value) => formatNumber(value),
  fraction: formatPercent,
  /** an angle on the sky, radians */
  rad: formatAngle,
  /** a phase, radians, shown in degrees */
  phase: (value) => `${formatNumber((value * 180) / Math.PI)} deg`,
  deg: (value) => `${formatNumber(value)} deg`,
  arcsec: (value) => formatAngle((value * Math.PI) / 648000),
  Jy: formatFlux,
  s: formatDuration,
  ns: (value) => `${formatNumber(value)} ns`,
  Hz: (value) => formatFrequency(value),
  m: formatLength,
  wavelengths: (value) => `${formatNumber(value)} wavelengths`,
  /** MJD (UTC), days */
  d: (value) => isoFromMjd(value),
  sigma: (value) => `${formatNumber(value)} sigma`,
  ratio: (value) => `${formatNumber(value)} times`,
  count: (value) => formatCount(value),
} satisfies Record<string, (value: number) => string>;

/** The units that a consequence may ask for with `as`. */
export const QUANTITY_UNITS: readonly string[] = Object.keys(FORMATS).filter((unit) => unit !== "");

/** A number in a unit of `QUANTITY_UNITS` as it reads best; in another unit, three digits and the unit. */
export function formatQuantity(value: number, unit: string): string {
  if (Number.isNaN(value)) return "unknown";
  if (!Number.isFinite(value)) return "without limit";
  if (Object.hasOwn(FORMATS, unit)) return FORMATS[unit as keyof typeof FORMATS](value);
  return `${formatNumber(value)} ${unit}`;
}
