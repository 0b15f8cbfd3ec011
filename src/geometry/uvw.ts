/**
 * u, v, w of a baseline and where a source stands in the sky. u is east, v north, w towards the source; the same
 * unit as the baseline vector. Angles in radians; hour angles are those of the frame the vector is in: local for the
 * local equatorial frame (sidereal time + longitude - right ascension), Greenwich for the geocentric one.
 */
import type { Vector3 } from "./earth.ts";
import { EARTH_ROTATION_RATE } from "./sidereal.ts";

/** Sidereal time less right ascension, wrapped to -pi < angle <= pi. */
export function hourAngle(siderealTime: number, rightAscension: number): number {
  const angle = siderealTime - rightAscension;
  const wrapped = angle - 2 * Math.PI * Math.round(angle / (2 * Math.PI));
  return wrapped <= -Math.PI ? wrapped + 2 * Math.PI : wrapped;
}

/**
 * Fill `matrix` (9, row by row) so that (u, v, w) = matrix (x, y, z).
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., Eq. 4.1
 */
export function fillUvwMatrix(hourAngle: number, declination: number, matrix: Float64Array): void {
  const sinH = Math.sin(hourAngle);
  const cosH = Math.cos(hourAngle);
  const sinD = Math.sin(declination);
  const cosD = Math.cos(declination);
  matrix[0] = sinH;
  matrix[1] = cosH;
  matrix[2] = 0;
  matrix[3] = -sinD * cosH;
  matrix[4] = sinD * sinH;
  matrix[5] = cosD;
  matrix[6] = cosD * cosH;
  matrix[7] = -cosD * sinH;
  matrix[8] = sinD;
}

/** u, v, w of one baseline vector; for many of one instant take `fillUvwMatrix` once. */
export function uvwOf(baseline: Vector3, hourAngle: number, declination: number): Vector3 {
  const matrix = new Float64Array(9);
  fillUvwMatrix(hourAngle, declination, matrix);
  return applyMatrix(matrix, baseline);
}

/** The baseline vector whose u, v, w these are: the inverse (transpose) of `uvwOf`. */
export function baselineOf(uvw: Vector3, hourAngle: number, declination: number): Vector3 {
  const m = new Float64Array(9);
  fillUvwMatrix(hourAngle, declination, m);
  const [u, v, w] = uvw;
  return [
    m[0]! * u + m[3]! * v + m[6]! * w,
    m[1]! * u + m[4]! * v + m[7]! * w,
    m[2]! * u + m[5]! * v + m[8]! * w,
  ];
}

/** @param matrix (9) row by row */
export function applyMatrix(matrix: Float64Array, vector: Vector3): Vector3 {
  const [x, y, z] = vector;
  return [
    matrix[0]! * x + matrix[1]! * y + matrix[2]! * z,
    matrix[3]! * x + matrix[4]! * y + matrix[5]! * z,
    matrix[6]! * x + matrix[7]! * y + matrix[8]! * z,
  ];
}

/** Change of u, v, w a radian of hour angle, as the Earth turns under a fixed baseline. */
export function uvwPerHourAngle(uvw: Vector3, declination: number): Vector3 {
  const [u, v, w] = uvw;
  const sinD = Math.sin(declination);
  const cosD = Math.cos(declination);
  return [w * cosD - v * sinD, u * sinD, -u * cosD];
}

/** Change of u, v, w a second of time. */
export function uvwRates(uvw: Vector3, declination: number): Vector3 {
  const [du, dv, dw] = uvwPerHourAngle(uvw, declination);
  return [du * EARTH_ROTATION_RATE, dv * EARTH_ROTATION_RATE, dw * EARTH_ROTATION_RATE];
}

/** Where a source stands, radians. */
export interface Horizontal {
  /** above the horizon; no refraction */
  readonly elevation: number;
  /** from north through east, 0 <= azimuth < 2 pi */
  readonly azimuth: number;
  /** angle at the source from the pole to the zenith, positive when the source is west of the meridian */
  readonly parallacticAngle: number;
}

/**
 * @param latitude geodetic
 * @param hourAngle local
 * @see Meeus 1998, Astronomical Algorithms, 2nd ed., chapters 13 and 14 (azimuth there is counted from the south)
 */
export function horizontalOf(latitude: number, hourAngle: number, declination: number): Horizontal {
  const sinF = Math.sin(latitude);
  const cosF = Math.cos(latitude);
  const sinD = Math.sin(declination);
  const cosD = Math.cos(declination);
  const sinH = Math.sin(hourAngle);
  const cosH = Math.cos(hourAngle);
  const north = cosF * sinD - sinF * cosD * cosH;
  const east = -cosD * sinH;
  const up = sinF * sinD + cosF * cosD * cosH;
  const azimuth = Math.atan2(east, north);
  return {
    // atan2 keeps its digits near the zenith, where asin would lose half of them.
    elevation: Math.atan2(up, Math.hypot(north, east)),
    azimuth: azimuth < 0 ? azimuth + 2 * Math.PI : azimuth,
    parallacticAngle: Math.atan2(sinH * cosF, sinF * cosD - cosF * sinD * cosH),
  };
}
