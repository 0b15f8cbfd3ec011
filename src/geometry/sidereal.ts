/**
 * Sidereal time: of the sky, and as a dataset's antenna table gives it.
 */

import type { ArrayInfo } from "../dataset/dataset.ts";
import { SECONDS_PER_DAY } from "../util/constants.ts";

/** Sidereal seconds of Greenwich mean sidereal time at 0h UT1 of J2000 and its rates a century, IAU 1982. */
const GMST_AT_0H = 24110.54841;
const GMST_PER_CENTURY = 8640184.812866;
const GMST_PER_CENTURY_2 = 0.093104;
const GMST_PER_CENTURY_3 = -6.2e-6;

/** MJD of J2000.0, 2000 January 1 12h. */
const MJD_J2000 = 51544.5;
const DAYS_PER_CENTURY = 36525;

/** Degrees the Earth turns against the mean equinox in a day of UT1 (rate of the IAU 1982 expression at J2000). */
export const SIDEREAL_DEGREES_PER_DAY = 360.98564736629;

/** Radians the Earth turns against the stars in a second, mean rate (Aoki et al. 1982, A&A 105, 359). */
export const EARTH_ROTATION_RATE = 7.292115e-5;

/**
 * Greenwich mean sidereal time, IAU 1982.
 *
 * @param mjdUt1 MJD (UT1, days); UTC is within 0.9 s of it, which turns the sky by at most 0.0038 degrees
 * @returns radians, 0 <= angle < 2 pi; NaN where the time is not finite
 * @see Aoki et al. 1982, A&A 105, 359
 */
export function greenwichSiderealTime(mjdUt1: number): number {
  const day = Math.floor(mjdUt1);
  // The whole days of the 86400 s a day term turn the sky by nothing: only the fraction is multiplied.
  const fraction = mjdUt1 - day;
  const t = (mjdUt1 - MJD_J2000) / DAYS_PER_CENTURY;
  const seconds =
    GMST_AT_0H +
    (GMST_PER_CENTURY + (GMST_PER_CENTURY_2 + GMST_PER_CENTURY_3 * t) * t) * t +
    fraction * SECONDS_PER_DAY;
  return turn((seconds / SECONDS_PER_DAY) * 2 * Math.PI);
}

/**
 * Greenwich sidereal time by the dataset's own tables: GSTIA0 + DEGPDY x (days since 0h of the reference date), mean
 * or apparent as the file's writer took it; IAU 1982 mean time where the tables have none.
 *
 * UT1 - UTC is not added to the file's value: writers differ on whether GSTIA0 holds it already. It is at most 0.9 s,
 * 0.0038 degrees, 7e-5 of a baseline.
 *
 * @param mjdUtc MJD (UTC, days)
 * @returns radians, 0 <= angle < 2 pi; NaN where the time is not finite
 */
export function siderealTimeOf(array: ArrayInfo, mjdUtc: number): number {
  const { siderealTimeAtReference, referenceDay, degreesPerDay, ut1MinusUtc } = array;
  if (siderealTimeAtReference === null || referenceDay === null) {
    return greenwichSiderealTime(mjdUtc + ut1MinusUtc / SECONDS_PER_DAY);
  }
  const days = mjdUtc - referenceDay;
  const day = Math.floor(days);
  // Whole turns are taken out day by day, so that a far reference date costs no digits.
  const degrees = siderealTimeAtReference + day * (degreesPerDay - 360) + (days - day) * degreesPerDay;
  return turn((degrees * Math.PI) / 180);
}

/** The angle brought into 0 <= angle < 2 pi. */
function turn(radians: number): number {
  const rest = radians % (2 * Math.PI);
  if (rest >= 0) return rest;
  const positive = rest + 2 * Math.PI;
  // A tiny negative angle rounds up to a whole turn.
  return positive === 2 * Math.PI ? 0 : positive;
}
