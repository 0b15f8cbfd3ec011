/**
 * Modified Julian dates and calendar dates, proleptic Gregorian. MJD 0 is 1858-11-17T00:00 (JD 2400000.5).
 * A day here has 86400 s: a leap second prints as the first second of the next day.
 */
import { SECONDS_PER_DAY } from "./constants.ts";

/** JD = MJD + this. */
export const MJD_EPOCH_JD = 2400000.5;

const MS_PER_DAY = 86_400_000;
const MJD_OF_1970 = 40587;

/**
 * ISO 8601 without a zone, such as `2024-06-15T12:34:56.5`; the caller says UTC.
 *
 * @param mjd days; NaN or outside the years 0 to 9999 gives "unknown"
 * @param options.seconds decimals of the seconds, 0 to 9 (default 0); a double resolves about a microsecond
 */
export function isoFromMjd(mjd: number, options: { readonly seconds?: number } = {}): string {
  const decimals = Math.min(9, Math.max(0, Math.trunc(options.seconds ?? 0)));
  if (!Number.isFinite(mjd)) return "unknown";
  let day = Math.floor(mjd);
  // Round once, before splitting, so that 59.9996 s never prints as 60.
  const scale = 10 ** decimals;
  let ticks = Math.round((mjd - day) * SECONDS_PER_DAY * scale);
  if (ticks >= SECONDS_PER_DAY * scale) {
    day += 1;
    ticks -= SECONDS_PER_DAY * scale;
  }
  const date = dateFromDay(day);
  if (date === undefined) return "unknown";
  const whole = Math.floor(ticks / scale);
  const fraction = decimals === 0 ? "" : `.${String(ticks - whole * scale).padStart(decimals, "0")}`;
  const clock = [Math.floor(whole / 3600), Math.floor(whole / 60) % 60, whole % 60];
  return `${date}T${clock.map((part) => String(part).padStart(2, "0")).join(":")}${fraction}`;
}

/** `2024-06-15` of an MJD; "unknown" as in isoFromMjd. */
export function dateFromMjd(mjd: number): string {
  return Number.isFinite(mjd) ? (dateFromDay(Math.floor(mjd)) ?? "unknown") : "unknown";
}

function dateFromDay(day: number): string | undefined {
  const milliseconds = (day - MJD_OF_1970) * MS_PER_DAY;
  if (!(Math.abs(milliseconds) <= 8.64e15)) return undefined;
  const date = new Date(milliseconds);
  const year = date.getUTCFullYear();
  if (year < 0 || year > 9999) return undefined;
  return `${String(year).padStart(4, "0")}-${two(date.getUTCMonth() + 1)}-${two(date.getUTCDate())}`;
}

function two(value: number): string {
  return String(value).padStart(2, "0");
}

/**
 * MJD of a date as FITS headers write it: `YYYY-MM-DD`, `YYYY-MM-DDThh:mm:ss[.s...]`, or the old `DD/MM/YY`, which is
 * always 19YY (FITS Standard 4.0, section 4.4.2.1); `DD/MM/YYYY` is met too. A trailing Z is allowed.
 *
 * @returns days; NaN when it is no such date (32 January, 25 o'clock)
 */
export function mjdFromDate(text: string): number {
  const trimmed = text.trim();
  const old = /^(\d{1,2})\/(\d{1,2})\/(\d{2}|\d{4})$/.exec(trimmed);
  if (old !== null) {
    const year = old[3]!.length === 2 ? 1900 + Number(old[3]) : Number(old[3]);
    return mjdFromCalendar(year, Number(old[2]), Number(old[1]));
  }
  const iso = /^(\d{4})-(\d{2})-(\d{2})(?:[T ](\d{2}):(\d{2})(?::(\d{2}(?:\.\d*)?))?)?Z?$/.exec(trimmed);
  if (iso === null) return Number.NaN;
  const day = mjdFromCalendar(Number(iso[1]), Number(iso[2]), Number(iso[3]));
  const hours = Number(iso[4] ?? 0);
  const minutes = Number(iso[5] ?? 0);
  const seconds = Number(iso[6] ?? 0);
  // 24:00 and a leap second's :60 are written by some; nothing later is a time.
  if (hours > 24 || minutes > 59 || seconds >= 61) return Number.NaN;
  return day + (hours * 3600 + minutes * 60 + seconds) / SECONDS_PER_DAY;
}

/** MJD at 0h of a calendar date; NaN when there is no such day. */
export function mjdFromCalendar(year: number, month: number, day: number): number {
  if (month < 1 || month > 12 || day < 1 || day > 31 || year < 0 || year > 9999) return Number.NaN;
  // Date.UTC takes the years 0 to 99 for 1900 to 1999: set the year on its own.
  const date = new Date(Date.UTC(2000, month - 1, day));
  date.setUTCFullYear(year, month - 1, day);
  if (date.getUTCDate() !== day) return Number.NaN;
  return date.getTime() / MS_PER_DAY + MJD_OF_1970;
}
