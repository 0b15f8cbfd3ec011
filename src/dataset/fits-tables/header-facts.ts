/** What headers say besides the layout: telescope, dates, unit, polarizations. */
import { dateFromMjd, mjdFromDate } from "../../util/dates.ts";
import type { Polarization } from "../dataset.ts";
import type { Header } from "../fits/header.ts";
import type { Notes } from "../notes.ts";
import type { RowSummary } from "../row-summary.ts";
import { type ArrayAxis, axisValue } from "./axes.ts";

/** FITS Standard 4.0, table 29: by the code on the STOKES axis. */
const STOKES: ReadonlyMap<number, Polarization> = new Map([
  [1, "I"],
  [2, "Q"],
  [3, "U"],
  [4, "V"],
  [-1, "RR"],
  [-2, "LL"],
  [-3, "RL"],
  [-4, "LR"],
  [-5, "XX"],
  [-6, "YY"],
  [-7, "XY"],
  [-8, "YX"],
]);

/** @throws InputError when a code is none of table 29's, or comes twice */
export function polarizationsOf(stokes: ArrayAxis, header: Header): Polarization[] {
  const found: Polarization[] = [];
  for (let i = 0; i < stokes.length; i++) {
    const code = axisValue(stokes, i);
    const polarization = Math.abs(code - Math.round(code)) < 1e-3 ? STOKES.get(Math.round(code)) : undefined;
    if (polarization === undefined || found.includes(polarization)) {
      throw header.error(
        `element ${i + 1} of the STOKES axis has code ${code}${polarization === undefined ? "" : " again"}: expected ` +
          "1 to 4 (I Q U V), -1 to -4 (RR LL RL LR) or -5 to -8 (XX YY XY YX), each once",
        `CRVAL${stokes.number}`,
      );
    }
    found.push(polarization);
  }
  return found;
}

const FACTS = {
  telescope: "TELESCOP",
  instrument: "INSTRUME",
  observer: "OBSERVER",
  object: "OBJECT",
  observed: "DATE-OBS",
  origin: "ORIGIN",
} as const;

/** Of the first of `headers` that says it. */
function shownIn(headers: readonly Header[], keyword: string): string | undefined {
  const found = headers.map((header) => header.shown(keyword)?.trim());
  return found.find((value) => value !== undefined && value !== "");
}

/** @param headers the first that says something counts */
export function headerFacts(headers: readonly Header[]): Record<string, string> {
  const facts: Record<string, string> = {};
  for (const [name, keyword] of Object.entries(FACTS)) {
    const value = shownIn(headers, keyword);
    if (value !== undefined) facts[name] = value;
  }
  return facts;
}

export function telescopeOf(headers: readonly Header[]): string {
  return shownIn(headers, "TELESCOP") ?? "";
}

/** "Jy" when the file says calibrated, "uncalibrated" when it says so or nothing, else what it says. */
export function unitOf(written: string | undefined): string {
  const unit = (written ?? "").trim();
  if (unit === "" || /^UNCALIB/i.test(unit)) return "uncalibrated";
  return /^JY$/i.test(unit) ? "Jy" : unit;
}

/** DATE-OBS is the first day of observing; some writers give the day of the reference time. */
const MOST_DAYS_APART = 3;

export function noteDates(headers: readonly Header[], summary: RowSummary, notes: Notes): void {
  const written = shownIn(headers, "DATE-OBS");
  if (written !== undefined) {
    const day = mjdFromDate(written);
    if (Number.isNaN(day)) notes.fault("odd-date", `DATE-OBS is "${written}", which is no date`);
    else if (day > summary.lastTime + MOST_DAYS_APART || day < summary.firstTime - MOST_DAYS_APART) {
      notes.fault(
        "date-disagrees",
        `DATE-OBS is ${dateFromMjd(day)}, the rows are from ${dateFromMjd(summary.firstTime)} to ` +
          `${dateFromMjd(summary.lastTime)}`,
      );
    }
  }
  // Radio interferometry began in 1946; what is later than 2100 is damage.
  const [earliest, latest] = [mjdFromDate("1946-01-01"), mjdFromDate("2100-01-01")];
  if (summary.firstTime < earliest || summary.lastTime > latest) {
    notes.fault(
      "impossible-time",
      `times run from ${dateFromMjd(summary.firstTime)} to ${dateFromMjd(summary.lastTime)} ` +
        `(MJD ${summary.firstTime} to ${summary.lastTime})`,
    );
  }
}
