/**
 * The w term: what an image made as if the array were flat does to sources away from the phase centre. Angles in
 * radians; a place in the field is given by `radius` = sqrt(l^2 + m^2), the sine of its angle from the phase centre.
 * @see Cornwell & Perley 1992, A&A 261, 353
 */

/** 1 - sqrt(1 - radius^2) without losing half the digits at arcminutes. */
export function planeDepth(radius: number): number {
  const square = radius * radius;
  return square / (1 + Math.sqrt(1 - square));
}

/**
 * Phase that w leaves at a place of the field, radians; its sign is that of -w.
 * @param w wavelengths
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., Eq. 3.7
 */
export function wPhase(w: number, radius: number): number {
  return -2 * Math.PI * w * planeDepth(radius);
}

/** Full width of the field over which |w| leaves at most `phase`, radians; at most the whole sky. */
export function uncorrectedField(w: number, phase: number): number {
  const depth = phase / (2 * Math.PI * Math.abs(w));
  // acos(1 - depth) as an arcsine of the half angle, which keeps its digits.
  return depth >= 1 ? Math.PI : 4 * Math.asin(Math.sqrt(depth / 2));
}

/** Planes from -w to w such that none is off its nearest by more than `phase` at the place `radius`. */
export function planesNeeded(w: number, radius: number, phase: number): number {
  const step = (2 * phase) / (2 * Math.PI * planeDepth(radius));
  const planes = Math.ceil((2 * Math.abs(w)) / step);
  return Number.isNaN(planes) ? Number.NaN : Math.max(1, planes);
}

/** Facets of the uncorrected field's width that cover a square field. */
export function facetsNeeded(w: number, field: number, phase: number): number {
  const ratio = field / uncorrectedField(w, phase);
  return Number.isNaN(ratio) ? Number.NaN : Math.max(1, Math.ceil(ratio * ratio));
}
