/** What the primary header says besides the layout: telescope, dates, unit, polarizations. */
import { dateFromMjd, mjdFromDate } from "../../util/dates.ts";
import type { Polarization } from "../dataset.ts";
import type { Header } from "../fits/header.ts";
import type { Notes } from "../notes.ts";
import { axisValue, type GroupLayout } from "../random-groups/layout.ts";
import type { RowSummary } from "../row-summary.ts";

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
export function polarizationsOf({ stokes, hdu }: GroupLayout): Polarization[] {
  const found: Polarization[] = [];
  for (let i = 0; i < stokes.length; i++) {
    const code = axisValue(stokes, i);
    const polarization = Math.abs(code - Math.round(code)) < 1e-3 ? STOKES.get(Math.round(code)) : undefined;
    if (polarization === undefined || found.includes(polarization)) {
      throw hdu.header.error(
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

export function headerFacts(header: Header): Record<string, string> {
  const facts: Record<string, string> = {};
  for (const [name, keyword] of Object.entries(FACTS)) {
    const value = header.shown(keyword)?.trim();
    if (value !== undefined && value !== "") facts[name] = value;
  }
  return facts;
}

export function telescopeOf(header: Header): string {
  return (header.shown("TELESCOP") ?? "").trim();
}

/** "Jy" when BUNIT says calibrated, "uncalibrated" when it says so or nothing, else what it says. */
export function unitOf(header: Header): string {
  const unit = (header.shown("BUNIT") ?? "").trim();
  if (unit === "" || /^UNCALIB/i.test(unit)) return "uncalibrated";
  return /^JY$/i.test(unit) ? "Jy" : unit;
}

/** DATE-OBS is the first day of observing; some writers give the day of the reference time. */
const MOST_DAYS_APART = 3;

export function noteDates(header: Header, summary: RowSummary, notes: Notes): void {
  const written = header.shown("DATE-OBS")?.trim();
  if (written !== undefined && written !== "") {
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
