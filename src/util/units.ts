/**
 * Quantities as people write them (`30arcmin`, `2GB`, `10s`) and as we print them. Parsers give SI numbers (angles in
 * radians, flux densities in Jy) and refuse what they do not know; printers choose the unit that reads best.
 */
import { InputError, nearest, type Place } from "./errors.ts";

const DEGREE = Math.PI / 180;
const ARCSECOND = DEGREE / 3600;

type Units = Readonly<Record<string, number>>;

const ANGLES: Units = {
  rad: 1,
  mrad: 1e-3,
  deg: DEGREE,
  "°": DEGREE,
  arcmin: DEGREE / 60,
  "'": DEGREE / 60,
  "′": DEGREE / 60,
  arcsec: ARCSECOND,
  '"': ARCSECOND,
  "″": ARCSECOND,
  mas: ARCSECOND / 1e3,
  uas: ARCSECOND / 1e6,
  µas: ARCSECOND / 1e6,
};
const SIZES: Units = {
  B: 1,
  kB: 1e3,
  MB: 1e6,
  GB: 1e9,
  TB: 1e12,
  KiB: 2 ** 10,
  MiB: 2 ** 20,
  GiB: 2 ** 30,
  TiB: 2 ** 40,
};
const DURATIONS: Units = { ms: 1e-3, s: 1, sec: 1, min: 60, h: 3600, hour: 3600, hours: 3600, d: 86400 };
const FREQUENCIES: Units = { Hz: 1, kHz: 1e3, MHz: 1e6, GHz: 1e9, THz: 1e12 };
const FLUXES: Units = { nJy: 1e-9, uJy: 1e-6, µJy: 1e-6, mJy: 1e-3, Jy: 1, kJy: 1e3 };
const LENGTHS: Units = { mm: 1e-3, cm: 1e-2, m: 1, km: 1e3 };

const QUANTITY = /^([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(\S*)$/;

/** The value in the base unit. Case counts only where it tells two units apart (mJy is not MJy). */
function parse(text: string, what: string, example: string, units: Units, place: Place): number {
  const match = QUANTITY.exec(text.trim());
  if (match === null) {
    throw new InputError(`"${text}" is not ${what}`, place, `Write a number and a unit, such as ${example}`);
  }
  const written = match[2]!.replace("μ", "µ");
  if (written === "") {
    throw new InputError(`"${text}" has no unit`, place, `Write ${what} with its unit, such as ${example}`);
  }
  const factor = factorOf(written, units);
  if (factor === undefined) {
    const near = nearest(written, Object.keys(units));
    const hint = near === undefined ? `Units of ${what}: ${Object.keys(units).join(", ")}` : undefined;
    throw new InputError(
      `unknown unit "${written}" in "${text}"${near === undefined ? "" : `: did you mean "${near}"?`}`,
      place,
      hint,
    );
  }
  const value = Number(match[1]) * factor;
  if (!Number.isFinite(value)) throw new InputError(`"${text}" is too large`, place);
  return value;
}

function factorOf(written: string, units: Units): number | undefined {
  if (Object.hasOwn(units, written)) return units[written];
  const alike = Object.keys(units).filter((unit) => unit.toLowerCase() === written.toLowerCase());
  // "MJy" is one letter's case from "mJy" and a thousand million times it: never guess there.
  return alike.length === 1 && units !== FLUXES ? units[alike[0]!] : undefined;
}

/** An angle, radians. @throws InputError at `place` */
export function parseAngle(text: string, place: Place = {}): number {
  return parse(text, "an angle", '"30arcmin"', ANGLES, place);
}

/** A size, whole bytes. `2GB` is 2e9, `2GiB` is 2 * 2^30. @throws InputError at `place`, also when negative */
export function parseSize(text: string, place: Place = {}): number {
  const bytes = Math.round(parse(text, "a size", '"2GB"', SIZES, place));
  if (!(bytes >= 0 && bytes <= Number.MAX_SAFE_INTEGER)) {
    throw new InputError(`"${text}" is not a possible size`, place);
  }
  return bytes;
}

/** A duration, seconds. @throws InputError at `place` */
export function parseDuration(text: string, place: Place = {}): number {
  return parse(text, "a duration", '"10s"', DURATIONS, place);
}

/** A frequency, Hz. @throws InputError at `place` */
export function parseFrequency(text: string, place: Place = {}): number {
  return parse(text, "a frequency", '"1.4GHz"', FREQUENCIES, place);
}

/** A flux density, Jy. @throws InputError at `place` */
export function parseFlux(text: string, place: Place = {}): number {
  return parse(text, "a flux density", '"0.1mJy"', FLUXES, place);
}

/** A length, metres. @throws InputError at `place` */
export function parseLength(text: string, place: Place = {}): number {
  return parse(text, "a length", '"25m"', LENGTHS, place);
}

/** `value` with three significant digits and the first unit that it reaches (the last is the smallest). */
function inUnits(value: number, steps: readonly (readonly [string, number])[]): string {
  if (!Number.isFinite(value)) return "unknown";
  const size = Math.abs(value);
  // 0.9995 of a unit already prints as 1.00 of it.
  const [unit, factor] = steps.find(([, step]) => size >= step * 0.9995) ?? steps.at(-1)!;
  return `${formatNumber(value / factor)} ${unit}`;
}

/** Three significant digits without a needless exponent: 0.0123, 1.23, 12.3, 1234. */
export function formatNumber(value: number, digits = 3): string {
  if (!Number.isFinite(value)) return "unknown";
  if (value === 0) return "0";
  const size = Math.abs(value);
  if (size >= 10 ** digits && size < 1e7) return String(Math.round(value));
  if (size >= 1e7 || size < 1e-4) return value.toExponential(digits - 1).replace("e+", "e");
  return String(Number(value.toPrecision(digits)));
}

/** Radians, as degrees, arcminutes, arcseconds, mas or uas. */
export function formatAngle(radians: number): string {
  if (radians === 0) return "0 arcsec";
  return inUnits(radians, [
    ["deg", DEGREE],
    ["arcmin", DEGREE / 60],
    ["arcsec", ARCSECOND],
    ["mas", ARCSECOND / 1e3],
    ["uas", ARCSECOND / 1e6],
  ]);
}

/** Hz, as GHz, MHz, kHz or Hz. `digits` significant ones (default 3): a sky frequency wants more than a width. */
export function formatFrequency(hertz: number, digits = 3): string {
  if (!Number.isFinite(hertz)) return "unknown";
  const size = Math.abs(hertz);
  const [unit, factor] =
    size >= 0.9995e9
      ? (["GHz", 1e9] as const)
      : size >= 0.9995e6
        ? (["MHz", 1e6] as const)
        : size >= 0.9995e3
          ? (["kHz", 1e3] as const)
          : (["Hz", 1] as const);
  return `${formatNumber(hertz / factor, digits)} ${unit}`;
}

/** Seconds, as `450 ms`, `12.5 s`, `3 min 20 s`, `5 h 12 min`, `2 d 3 h`. */
export function formatDuration(seconds: number): string {
  if (!Number.isFinite(seconds)) return "unknown";
  if (seconds < 0) return `-${formatDuration(-seconds)}`;
  if (seconds === 0) return "0 s";
  if (seconds < 0.9995) return `${formatNumber(seconds * 1e3)} ms`;
  if (seconds < 99.95) return `${formatNumber(seconds)} s`;
  const steps = [
    ["d", 86400, "h", 3600],
    ["h", 3600, "min", 60],
    ["min", 60, "s", 1],
  ] as const;
  for (const [large, largeSize, small, smallSize] of steps) {
    const smalls = Math.round(seconds / smallSize);
    const ratio = largeSize / smallSize;
    if (smalls < ratio) continue;
    const rest = smalls % ratio;
    return `${Math.floor(smalls / ratio)} ${large}${rest === 0 ? "" : ` ${rest} ${small}`}`;
  }
  return `${formatNumber(seconds)} s`;
}

/** Bytes, decimal: `553 kB`, `2.10 GB`. */
export function formatBytes(bytes: number): string {
  return inUnits(bytes, [
    ["TB", 1e12],
    ["GB", 1e9],
    ["MB", 1e6],
    ["kB", 1e3],
    ["B", 1],
  ]);
}

/** Jy, as Jy, mJy, uJy or nJy. */
export function formatFlux(jansky: number): string {
  if (jansky === 0) return "0 Jy";
  return inUnits(jansky, [
    ["kJy", 1e3],
    ["Jy", 1],
    ["mJy", 1e-3],
    ["uJy", 1e-6],
    ["nJy", 1e-9],
  ]);
}

/** Metres, as km, m, cm or mm. */
export function formatLength(metres: number): string {
  if (metres === 0) return "0 m";
  return inUnits(metres, [
    ["km", 1e3],
    ["m", 1],
    ["cm", 1e-2],
    ["mm", 1e-3],
  ]);
}

/** A fraction as per cent. What is neither none nor all never prints as 0 % or 100 %. */
export function formatPercent(fraction: number): string {
  if (!Number.isFinite(fraction)) return "unknown";
  const percent = fraction * 100;
  if (percent > 0 && percent < 0.001) return "< 0.001 %";
  if (percent < 100 && percent > 99.99) return "> 99.99 %";
  const digits = Math.abs(percent) >= 99 || (Math.abs(percent) >= 10 && Number.isInteger(percent)) ? 4 : 3;
  return `${Number(percent.toPrecision(digits))} %`;
}

/** A whole number with its thousands apart: `12,345,678`. */
export function formatCount(count: number): string {
  if (!Number.isFinite(count)) return "unknown";
  const sign = count < 0 ? "-" : "";
  return sign + String(Math.round(Math.abs(count))).replace(/\B(?=(\d{3})+$)/g, ",");
}

/** Radians, as `06h24m43.2s`. NaN is "unknown". */
export function formatRightAscension(radians: number, decimals = 2): string {
  if (!Number.isFinite(radians)) return "unknown";
  const turn = ((radians / (2 * Math.PI)) % 1) + (radians < 0 ? 1 : 0);
  const scale = 10 ** decimals;
  const ticks = Math.round(turn * 86400 * scale) % (86400 * scale);
  const [hours, minutes, seconds] = sexagesimal(ticks, decimals);
  return `${hours}h${minutes}m${seconds}s`;
}

/** Radians, as `-05d51m11.6s`. NaN is "unknown". */
export function formatDeclination(radians: number, decimals = 1): string {
  if (!Number.isFinite(radians)) return "unknown";
  const ticks = Math.round((Math.abs(radians) / ARCSECOND) * 10 ** decimals);
  const [degrees, minutes, seconds] = sexagesimal(ticks, decimals);
  return `${radians < 0 && ticks > 0 ? "-" : "+"}${degrees}d${minutes}m${seconds}s`;
}

/** Ticks of 10^-decimals seconds as two-digit whole units, minutes, and seconds with their decimals. */
function sexagesimal(ticks: number, decimals: number): [string, string, string] {
  const scale = 10 ** decimals;
  const whole = Math.floor(ticks / scale);
  const two = (value: number) => String(value).padStart(2, "0");
  const fraction = decimals === 0 ? "" : `.${String(ticks - whole * scale).padStart(decimals, "0")}`;
  return [two(Math.floor(whole / 3600)), two(Math.floor(whole / 60) % 60), two(whole % 60) + fraction];
}
