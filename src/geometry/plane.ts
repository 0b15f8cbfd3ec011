/**
 * The plane w = a u + b v through the spacings of a moment. A flat array has one at every moment; what it takes up of
 * w only warps the image, and only what it leaves blurs it.
 * @see Cornwell & Perley 1992, A&A 261, 353
 */

export interface Plane {
  readonly a: number;
  readonly b: number;
  /** false where all (u, v) lie on a line: then a, b are the smallest that fit */
  readonly determined: boolean;
}

/** Width of the (u, v) over their length below which they count as a line. */
const LINE = 1e-3;

/**
 * Weighted least squares.
 * @param u,v,w (n) one unit
 * @param weight (n) >= 0; those of a sample that is not finite must be 0
 */
export function fitPlane(
  u: ArrayLike<number>,
  v: ArrayLike<number>,
  w: ArrayLike<number>,
  weight: ArrayLike<number>,
): Plane {
  let [uu, uv, vv, uw, vw] = [0, 0, 0, 0, 0];
  for (let i = 0; i < u.length; i++) {
    const t = weight[i]!;
    if (t === 0) continue;
    uu += t * u[i]! * u[i]!;
    uv += t * u[i]! * v[i]!;
    vv += t * v[i]! * v[i]!;
    uw += t * u[i]! * w[i]!;
    vw += t * v[i]! * w[i]!;
  }
  const mean = (uu + vv) / 2;
  const spread = Math.hypot((uu - vv) / 2, uv);
  const large = mean + spread;
  const small = mean - spread;
  if (!(large > 0)) return { a: 0, b: 0, determined: false };
  if (small > LINE * LINE * large) {
    const determinant = uu * vv - uv * uv;
    return {
      a: (uw * vv - vw * uv) / determinant,
      b: (vw * uu - uw * uv) / determinant,
      determined: true,
    };
  }
  const angle = 0.5 * Math.atan2(2 * uv, uu - vv);
  const [x, y] = [Math.cos(angle), Math.sin(angle)];
  const slope = (uw * x + vw * y) / large;
  return { a: slope * x, b: slope * y, determined: false };
}

export interface PlaneRest {
  /** weighted rms of w and of w - a u - b v */
  readonly wRms: number;
  readonly rms: number;
  /** largest |w - a u - b v| with a weight */
  readonly largest: number;
}

export function planeRest(
  plane: Plane,
  u: ArrayLike<number>,
  v: ArrayLike<number>,
  w: ArrayLike<number>,
  weight: ArrayLike<number>,
): PlaneRest {
  let [total, squares, wSquares, largest] = [0, 0, 0, 0];
  for (let i = 0; i < u.length; i++) {
    const t = weight[i]!;
    if (t === 0) continue;
    const rest = w[i]! - plane.a * u[i]! - plane.b * v[i]!;
    total += t;
    squares += t * rest * rest;
    wSquares += t * w[i]! * w[i]!;
    largest = Math.max(largest, Math.abs(rest));
  }
  if (total === 0) return { wRms: Number.NaN, rms: Number.NaN, largest: Number.NaN };
  return { wRms: Math.sqrt(wSquares / total), rms: Math.sqrt(squares / total), largest };
}

/** A plane w = a u + b v + c that most antennas lie on. */
export interface ArrayPlane {
  readonly a: number;
  readonly b: number;
  readonly c: number;
}

/** Fewer antennas than these have no plane that one of them could be off. */
export const LEAST_ANTENNAS_OF_A_PLANE = 5;

/** Antennas further off than this many times the typical distance have no say in where the plane is. */
const OFF_PLANE = 6;

/**
 * The plane that most antennas lie on, of which a few may be off by any amount: least absolute deviations first, then
 * least squares over those near it. Null with too few antennas, or when they lie on a line.
 */
export function fitArrayPlane(
  u: ArrayLike<number>,
  v: ArrayLike<number>,
  w: ArrayLike<number>,
): ArrayPlane | null {
  if (u.length < LEAST_ANTENNAS_OF_A_PLANE) return null;
  const rough = leastAbsolutePlane(u, v, w);
  if (rough === null) return null;
  const heights = Float64Array.from({ length: u.length }, (_, i) =>
    Math.abs(heightOff(rough, u[i]!, v[i]!, w[i]!)),
  );
  // The plane goes through three of them: the typical height is that of the others.
  const typical = heights.slice().sort()[Math.min(u.length - 1, 3 + ((u.length - 3) >> 1))]!;
  return (
    weightedPlane(
      u,
      v,
      w,
      heights.map((height) => (height <= OFF_PLANE * typical ? 1 : 0)),
    ) ?? rough
  );
}

function leastAbsolutePlane(
  u: ArrayLike<number>,
  v: ArrayLike<number>,
  w: ArrayLike<number>,
): ArrayPlane | null {
  const count = u.length;
  const weight = new Float64Array(count).fill(1);
  let scale = 0;
  for (let i = 0; i < count; i++) scale = Math.max(scale, Math.abs(u[i]!), Math.abs(v[i]!));
  let plane: ArrayPlane | null = null;
  for (let round = 0; round < 50; round++) {
    const next = weightedPlane(u, v, w, weight);
    if (next === null) return plane;
    let change = 0;
    for (let i = 0; i < count; i++) {
      const rest = Math.abs(w[i]! - next.a * u[i]! - next.b * v[i]! - next.c);
      const updated = 1 / Math.max(rest, scale * 1e-9);
      change = Math.max(change, Math.abs(updated / weight[i]! - 1));
      weight[i] = updated;
    }
    plane = next;
    if (change < 1e-6) break;
  }
  return plane;
}

function weightedPlane(
  u: ArrayLike<number>,
  v: ArrayLike<number>,
  w: ArrayLike<number>,
  weight: ArrayLike<number>,
): ArrayPlane | null {
  let total = 0;
  const mean = [0, 0, 0];
  for (let i = 0; i < u.length; i++) {
    total += weight[i]!;
    mean[0]! += weight[i]! * u[i]!;
    mean[1]! += weight[i]! * v[i]!;
    mean[2]! += weight[i]! * w[i]!;
  }
  const [mu, mv, mw] = [mean[0]! / total, mean[1]! / total, mean[2]! / total];
  const plane = fitPlane(
    Float64Array.from({ length: u.length }, (_, i) => u[i]! - mu),
    Float64Array.from({ length: u.length }, (_, i) => v[i]! - mv),
    Float64Array.from({ length: u.length }, (_, i) => w[i]! - mw),
    weight,
  );
  return plane.determined ? { a: plane.a, b: plane.b, c: mw - plane.a * mu - plane.b * mv } : null;
}

/** Height of an antenna off the plane, along the plane's normal on the side of growing w. */
export function heightOff(plane: ArrayPlane, u: number, v: number, w: number): number {
  return (w - plane.a * u - plane.b * v - plane.c) / Math.sqrt(1 + plane.a * plane.a + plane.b * plane.b);
}
