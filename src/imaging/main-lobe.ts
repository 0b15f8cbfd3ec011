/**
 * The main lobe of the dirty beam: the ellipse at half its peak, which is the half-maximum ellipse of the elliptical
 * Gaussian that stands for it.
 *
 * Near its peak the beam needs no fine uv cells: a few thousand coarse ones, each with its first and second moments,
 * give it to 1e-4 at any place, so the contour is followed by direct sums.
 */
import type { FilledCells } from "./moment-grid.ts";

export interface Ellipse {
  /** full width at half maximum, radians */
  readonly major: number;
  readonly minor: number;
  /** of the major axis, north through east, -pi/2 < angle <= pi/2 */
  readonly positionAngle: number;
}

export const UNKNOWN_ELLIPSE: Ellipse = { major: Number.NaN, minor: Number.NaN, positionAngle: Number.NaN };

/** Coarse cells across the uv extent. */
const COARSE = 80;
const DIRECTIONS = 24;
const HALF = 0.5;

/** @returns NaN in all where there is no cell, or the beam does not fall to half inside what it can be followed */
export function fitMainLobe(cells: FilledCells, factors: Float64Array): Ellipse {
  const lobe = new LobeSum(cells, factors);
  const axes = lobe.curvatureAxes();
  if (axes === null) return UNKNOWN_ELLIPSE;
  // In units of the curvature ellipse the contour is near a circle, whatever the elongation.
  let aa = 0;
  let ab = 0;
  let bb = 0;
  const normal = new Float64Array(12);
  for (let k = 0; k < DIRECTIONS; k++) {
    const angle = (Math.PI * k) / DIRECTIONS;
    const x = Math.cos(angle);
    const y = Math.sin(angle);
    const radius = lobe.halfRadius(axes.l1 * x + axes.l2 * y, axes.m1 * x + axes.m2 * y);
    if (!(radius > 0)) return UNKNOWN_ELLIPSE;
    addRow(normal, [x * x, 2 * x * y, y * y], 1 / (radius * radius));
  }
  [aa, ab, bb] = solve3(normal);
  return ellipseOf(aa, ab, bb, axes);
}

/** Add one equation row . unknowns = value to the 3 x 3 normal equations and their right side. */
function addRow(normal: Float64Array, row: readonly [number, number, number], value: number): void {
  for (let i = 0; i < 3; i++) {
    for (let j = 0; j < 3; j++) normal[i * 4 + j]! += row[i]! * row[j]!;
    normal[i * 4 + 3]! += row[i]! * value;
  }
}

/** Gauss elimination with pivots of a 3 x 4 system. */
function solve3(system: Float64Array): [number, number, number] {
  const m = system.slice();
  for (let i = 0; i < 3; i++) {
    let pivot = i;
    for (let r = i + 1; r < 3; r++) if (Math.abs(m[r * 4 + i]!) > Math.abs(m[pivot * 4 + i]!)) pivot = r;
    for (let c = 0; c < 4; c++) [m[i * 4 + c], m[pivot * 4 + c]] = [m[pivot * 4 + c]!, m[i * 4 + c]!];
    for (let r = 0; r < 3; r++) {
      if (r === i) continue;
      const factor = m[r * 4 + i]! / m[i * 4 + i]!;
      for (let c = i; c < 4; c++) m[r * 4 + c]! -= factor * m[i * 4 + c]!;
    }
  }
  return [m[3]! / m[0]!, m[7]! / m[5]!, m[11]! / m[10]!];
}

/** Two half axes of the ellipse that the curvature at the peak gives, as (l, m) vectors, radians. */
interface Axes {
  readonly l1: number;
  readonly m1: number;
  readonly l2: number;
  readonly m2: number;
}

/** From aa x^2 + 2 ab x y + bb y^2 = 1 in units of the axes to the sky. */
function ellipseOf(aa: number, ab: number, bb: number, axes: Axes): Ellipse {
  const determinant = axes.l1 * axes.m2 - axes.l2 * axes.m1;
  // (x, y) = inverse (l, m)
  const xl = axes.m2 / determinant;
  const xm = -axes.l2 / determinant;
  const yl = -axes.m1 / determinant;
  const ym = axes.l1 / determinant;
  const ll = aa * xl * xl + 2 * ab * xl * yl + bb * yl * yl;
  const lm = aa * xl * xm + ab * (xl * ym + xm * yl) + bb * yl * ym;
  const mm = aa * xm * xm + 2 * ab * xm * ym + bb * ym * ym;
  const mean = (ll + mm) / 2;
  const spread = Math.hypot((ll - mm) / 2, lm);
  if (!(mean - spread > 0)) return UNKNOWN_ELLIPSE;
  // The long axis lies where the quadratic form is smallest.
  const turn = 0.5 * Math.atan2(-2 * lm, ll - mm);
  const angle = wrapHalfTurn(turn);
  return { major: 2 / Math.sqrt(mean - spread), minor: 2 / Math.sqrt(mean + spread), positionAngle: angle };
}

function wrapHalfTurn(angle: number): number {
  const wrapped = angle - Math.PI * Math.round(angle / Math.PI);
  return wrapped <= -Math.PI / 2 ? wrapped + Math.PI : wrapped;
}

/** The beam near its peak as a sum over coarse cells. */
class LobeSum {
  private readonly u: Float64Array;
  private readonly v: Float64Array;
  /** (cells x 6) sums of T, T du, T dv, T du^2, T du dv, T dv^2 */
  private readonly sums: Float64Array;
  private readonly total: number;
  private readonly uu: number;
  private readonly uv: number;
  private readonly vv: number;

  constructor(cells: FilledCells, factors: Float64Array) {
    const { field } = cells.form;
    const width = Math.max(1, Math.ceil((2 * reachOf(cells)) / COARSE));
    const places = new Map<number, number>();
    const sums: number[] = [];
    const u: number[] = [];
    const v: number[] = [];
    let [total, uu, uv, vv] = [0, 0, 0, 0];
    const low = new Float64Array(6);
    for (let i = 0; i < cells.count; i++) {
      fillPowers(cells, i, factors[i]!, low);
      const cu = Math.floor(cells.iu[i]! / width);
      const cv = Math.floor(cells.iv[i]! / width);
      const key = cu * 65536 + cv + 32768;
      let place = places.get(key);
      if (place === undefined) {
        place = u.length;
        places.set(key, place);
        u.push(((cu + 0.5) * width - 0.5) / field);
        v.push(((cv + 0.5) * width - 0.5) / field);
        sums.push(0, 0, 0, 0, 0, 0);
      }
      addShifted(
        sums,
        place * 6,
        low,
        cells.iu[i]! / field - u[place]!,
        cells.iv[i]! / field - v[place]!,
        field,
      );
      const [t, , , tuu, tuv, tvv] = shifted(low, cells.iu[i]! / field, cells.iv[i]! / field, field);
      total += t;
      uu += tuu;
      uv += tuv;
      vv += tvv;
    }
    this.u = Float64Array.from(u);
    this.v = Float64Array.from(v);
    this.sums = Float64Array.from(sums);
    this.total = total;
    this.uu = uu / total;
    this.uv = uv / total;
    this.vv = vv / total;
  }

  /**
   * Half axes of the half-maximum ellipse of the Gaussian with the beam's curvature at its peak:
   * B = 1 - 2 pi^2 (l^2 <uu> + 2 l m <uv> + m^2 <vv>). Null where there is nothing; one spacing of no width gets a
   * finite axis, so that a line of samples can be told apart.
   */
  curvatureAxes(): Axes | null {
    if (!(this.total > 0)) return null;
    const mean = (this.uu + this.vv) / 2;
    const spread = Math.hypot((this.uu - this.vv) / 2, this.uv);
    const large = mean + spread;
    const small = Math.max(mean - spread, large * 1e-8);
    if (!(large > 0)) return null;
    const angle = 0.5 * Math.atan2(2 * this.uv, this.uu - this.vv);
    const half = Math.sqrt(2 * Math.LN2) / (2 * Math.PI);
    const short = half / Math.sqrt(large);
    const long = half / Math.sqrt(small);
    return {
      l1: short * Math.cos(angle),
      m1: short * Math.sin(angle),
      l2: -long * Math.sin(angle),
      m2: long * Math.cos(angle),
    };
  }

  /** First r > 0 with B(r l, r m) = 1/2, or NaN when there is none below 8. */
  halfRadius(l: number, m: number): number {
    const above = (r: number) => this.at(r * l, r * m) - HALF;
    let inside = 0;
    let insideValue = HALF;
    for (let outside = 0.5; outside <= 8; outside += 0.5) {
      const value = above(outside);
      if (value <= 0) return crossing(above, inside, insideValue, outside, value);
      inside = outside;
      insideValue = value;
    }
    return Number.NaN;
  }

  private at(l: number, m: number): number {
    const { u, v, sums } = this;
    let value = 0;
    for (let i = 0; i < u.length; i++) {
      const phase = 2 * Math.PI * (u[i]! * l + v[i]! * m);
      const s = i * 6;
      const first = 2 * Math.PI * (sums[s + 1]! * l + sums[s + 2]! * m);
      const second =
        2 * Math.PI * Math.PI * (sums[s + 3]! * l * l + 2 * sums[s + 4]! * l * m + sums[s + 5]! * m * m);
      value += (sums[s]! - second) * Math.cos(phase) - first * Math.sin(phase);
    }
    return value / this.total;
  }
}

/** Where f crosses zero between two places of other sign: false position, the stuck end's value halved (Illinois). */
function crossing(
  f: (r: number) => number,
  inside: number,
  insideValue: number,
  outside: number,
  outsideValue: number,
): number {
  let [a, fa, b, fb] = [inside, insideValue, outside, outsideValue];
  for (let step = 0; step < 30; step++) {
    const r = (a * fb - b * fa) / (fb - fa);
    const value = f(r);
    if (Math.abs(value) < 1e-7 || Math.abs(b - a) < 1e-9) return r;
    if (value > 0 === fb > 0) fa /= 2;
    else [a, fa] = [b, fb];
    [b, fb] = [r, value];
  }
  return b;
}

/** Cells from the origin to the furthest filled one. */
function reachOf(cells: FilledCells): number {
  let reach = 1;
  for (let i = 0; i < cells.count; i++) reach = Math.max(reach, cells.iu[i]!, Math.abs(cells.iv[i]!));
  return reach;
}

/**
 * Sums of T, T x, T y, T x^2, T x y, T y^2 with x, y in cells from the middle of the cell, from its Legendre
 * moments; what the grid's order does not hold is left out.
 */
function fillPowers(cells: FilledCells, i: number, factor: number, low: Float64Array): void {
  const { order } = cells.form;
  const size = ((order + 1) * (order + 2)) / 2;
  const at = (a: number, b: number) =>
    a + b <= order ? factor * cells.moments[i * size + a * (order + 1) - (a * (a - 1)) / 2 + b]! : 0;
  low[0] = at(0, 0);
  low[1] = at(1, 0) / 2;
  low[2] = at(0, 1) / 2;
  // P_2(t) = (3 t^2 - 1)/2 with t = 2x
  low[3] = (2 * at(2, 0) + low[0]) / 12;
  low[4] = at(1, 1) / 4;
  low[5] = (2 * at(0, 2) + low[0]) / 12;
}

/** The same about a point that lies (-du, -dv) wavelengths from the middle of the cell. */
function shifted(
  low: Float64Array,
  du: number,
  dv: number,
  field: number,
): [number, number, number, number, number, number] {
  const t = low[0]!;
  const x = low[1]! / field;
  const y = low[2]! / field;
  const f2 = field * field;
  return [
    t,
    x + t * du,
    y + t * dv,
    low[3]! / f2 + 2 * x * du + t * du * du,
    low[4]! / f2 + x * dv + y * du + t * du * dv,
    low[5]! / f2 + 2 * y * dv + t * dv * dv,
  ];
}

function addShifted(
  sums: number[],
  at: number,
  low: Float64Array,
  du: number,
  dv: number,
  field: number,
): void {
  const values = shifted(low, du, dv, field);
  for (let k = 0; k < 6; k++) sums[at + k]! += values[k]!;
}
