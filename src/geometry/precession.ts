/** Precession of the equator and equinox: catalogue coordinates brought to those of a date. Angles in radians. */

const ARCSECOND = Math.PI / 180 / 3600;
const MJD_J2000 = 51544.5;
const DAYS_PER_CENTURY = 36525;
/** MJD of the Besselian epoch 1950.0 and the tropical year that such epochs count. */
const MJD_B1950 = 33281.9235;
const TROPICAL_YEAR = 365.242198781;

/**
 * MJD of an equinox: Besselian before 1984, as catalogues of that time were, Julian after.
 * @see Lieske 1979, A&A 73, 282
 */
export function equinoxDay(equinox: number): number {
  return equinox < 1984
    ? MJD_B1950 + (equinox - 1950) * TROPICAL_YEAR
    : MJD_J2000 + (equinox - 2000) * 365.25;
}

/**
 * Mean place at one date of a place given for the equator and equinox of another; no nutation, aberration or
 * proper motion, whose few 10 arcseconds turn spacings by a ten-thousandth.
 *
 * @param fromDay,toDay MJD
 * @returns right ascension 0..2 pi, declination
 * @see Lieske et al. 1977, A&A 58, 1 (IAU 1976)
 */
export function precess(
  rightAscension: number,
  declination: number,
  fromDay: number,
  toDay: number,
): { readonly rightAscension: number; readonly declination: number } {
  const T = (fromDay - MJD_J2000) / DAYS_PER_CENTURY;
  const t = (toDay - fromDay) / DAYS_PER_CENTURY;
  const first = 2306.2181 + (1.39656 - 0.000139 * T) * T;
  const zeta = ARCSECOND * t * (first + (0.30188 - 0.000344 * T + 0.017998 * t) * t);
  const z = ARCSECOND * t * (first + (1.09468 + 0.000066 * T + 0.018203 * t) * t);
  const theta =
    ARCSECOND * t * (2004.3109 - (0.8533 + 0.000217 * T) * T - (0.42665 + 0.000217 * T + 0.041833 * t) * t);
  const turned = rightAscension + zeta;
  const east = Math.cos(declination) * Math.sin(turned);
  const equator =
    Math.cos(theta) * Math.cos(declination) * Math.cos(turned) - Math.sin(theta) * Math.sin(declination);
  const pole =
    Math.sin(theta) * Math.cos(declination) * Math.cos(turned) + Math.cos(theta) * Math.sin(declination);
  const angle = Math.atan2(east, equator) + z;
  return {
    rightAscension: angle - 2 * Math.PI * Math.floor(angle / (2 * Math.PI)),
    declination: Math.atan2(pole, Math.hypot(east, equator)),
  };
}
