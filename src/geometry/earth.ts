/**
 * Positions on the Earth and the frames they are given in: east-north-up at a place, the local equatorial frame
 * (x to the local meridian on the equator, y east, z to the pole) and the geocentric one (x to Greenwich).
 * Metres and radians; longitude east.
 */

export type Vector3 = readonly [number, number, number];

export interface Geodetic {
  /** radians */
  readonly latitude: number;
  /** radians, east positive */
  readonly longitude: number;
  /** metres above the ellipsoid */
  readonly height: number;
}

/** WGS84 ellipsoid (NIMA TR8350.2, 2000): equatorial radius in metres, and flattening. */
export const WGS84_RADIUS = 6378137;
export const WGS84_FLATTENING = 1 / 298.257223563;
const ECCENTRICITY_2 = WGS84_FLATTENING * (2 - WGS84_FLATTENING);

/**
 * East, north, up at a geodetic latitude as the local equatorial frame. A difference of positions, or a position from
 * an origin at that place.
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., section 4.1
 */
export function enuToLocal(enu: Vector3, latitude: number): Vector3 {
  const [east, north, up] = enu;
  const s = Math.sin(latitude);
  const c = Math.cos(latitude);
  return [c * up - s * north, east, c * north + s * up];
}

/** Inverse of `enuToLocal`. */
export function localToEnu(local: Vector3, latitude: number): Vector3 {
  const [x, y, z] = local;
  const s = Math.sin(latitude);
  const c = Math.cos(latitude);
  return [y, c * z - s * x, c * x + s * z];
}

/** Local equatorial frame at a longitude turned into the orientation of the geocentric one. */
export function localToGeocentric(local: Vector3, longitude: number): Vector3 {
  const [x, y, z] = local;
  const s = Math.sin(longitude);
  const c = Math.cos(longitude);
  return [c * x - s * y, s * x + c * y, z];
}

/** Inverse of `localToGeocentric`. */
export function geocentricToLocal(geocentric: Vector3, longitude: number): Vector3 {
  return localToGeocentric(geocentric, -longitude);
}

/** A place on or above the WGS84 ellipsoid, from the Earth's centre. */
export function geodeticToGeocentric(place: Geodetic): Vector3 {
  const s = Math.sin(place.latitude);
  const c = Math.cos(place.latitude);
  const normal = WGS84_RADIUS / Math.sqrt(1 - ECCENTRICITY_2 * s * s);
  const axial = (normal + place.height) * c;
  return [
    axial * Math.cos(place.longitude),
    axial * Math.sin(place.longitude),
    (normal * (1 - ECCENTRICITY_2) + place.height) * s,
  ];
}

/**
 * Inverse of `geodeticToGeocentric`, to a micrometre within 100 km of the ellipsoid.
 * The Earth's centre has no latitude: it gives NaN.
 */
export function geocentricToGeodetic(position: Vector3): Geodetic {
  const [x, y, z] = position;
  const axial = Math.hypot(x, y);
  if (axial === 0 && z === 0) return { latitude: Number.NaN, longitude: Number.NaN, height: Number.NaN };
  const longitude = Math.atan2(y, x);
  let latitude = Math.atan2(z, axial * (1 - ECCENTRICITY_2));
  // Each step of this fixed point takes the error down by the eccentricity squared, 150 times.
  for (let step = 0; step < 8; step++) {
    const s = Math.sin(latitude);
    const normal = WGS84_RADIUS / Math.sqrt(1 - ECCENTRICITY_2 * s * s);
    latitude = Math.atan2(z + ECCENTRICITY_2 * normal * s, axial);
  }
  const s = Math.sin(latitude);
  const c = Math.cos(latitude);
  const height = axial * c + z * s - WGS84_RADIUS * Math.sqrt(1 - ECCENTRICITY_2 * s * s);
  return { latitude, longitude, height };
}
