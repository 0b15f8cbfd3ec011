/**
 * What amplitude the rest of the array makes likely on an antenna's baselines: that of other antennas' baselines near in
 * the uv plane, so that a resolved sky is no antenna's fault.
 */
import { median, robustSigma } from "../../util/statistics.ts";
import type { Grid, Plane } from "./grid.ts";

/** Mean power of a stretch of one baseline: of means over a few integrations, noise taken off. */
interface Point {
  readonly baseline: number;
  readonly u: number;
  readonly v: number;
  readonly power: number;
  /** of `power` when there is no signal */
  readonly error: number;
}

export interface AntennaLevel {
  /** power over that expected; NaN unknown */
  readonly power: number;
  /** by noise */
  readonly powerError: number;
  /** median of ln(amplitude over that expected), and its robust scatter over the stretches */
  readonly logAmplitude: number;
  readonly scatter: number;
  /** share of the stretches below what is expected */
  readonly below: number;
  /** expected power over its error by noise */
  readonly expected: number;
  readonly stretches: number;
  /** share of the stretches without signal, and the baselines they are on */
  readonly silent: number;
  readonly baselines: number;
}

const COHERENT = 8;
const NEIGHBOURS = 5;
const MOST_POINTS = 1500;
const MOST_OTHERS = 500;
const MOST_OWN = 80;
const MOST_PLANES = 4;

/** What there is to compare, by plane. */
export type LevelPoints = readonly (readonly Point[])[];

/** @param planes of one polarization */
export function levelPoints(grid: Grid, planes: readonly Plane[]): LevelPoints {
  const stretches = Math.max(1, Math.min(8, Math.floor(MOST_POINTS / Math.max(1, grid.baselines))));
  const stride = Math.ceil(planes.length / MOST_PLANES);
  return planes.filter((_, i) => i % stride === 0).map((plane) => pointsOf(grid, plane, stretches));
}

/** @param ignore antennas (indices) that are no measure for others */
export function levelsByAntenna(
  grid: Grid,
  points: LevelPoints,
  ignore: ReadonlySet<number>,
): AntennaLevel[] {
  const planes = points.map((ofPlane) => planePoints(grid, ofPlane, ignore));
  return grid.antennas.map((_, antenna) => levelOf(grid, planes, antenna, ignore));
}

/** The points of one plane, ready to be asked by antenna. */
interface PlanePoints {
  /** in the order of the baselines */
  readonly all: readonly Point[];
  /** (baselines + 1) first point of each */
  readonly first: Int32Array;
  /** of no ignored antenna, from which each antenna's others are taken; of very many an even choice */
  readonly trusted: readonly Point[];
}

/** Of more than this many, one choice of others serves all antennas. */
const MOST_TRUSTED = 4000;

function planePoints(grid: Grid, all: readonly Point[], ignore: ReadonlySet<number>): PlanePoints {
  const first = new Int32Array(grid.baselines + 1);
  for (const { baseline } of all) first[baseline + 1]! += 1;
  for (let b = 0; b < grid.baselines; b++) first[b + 1]! += first[b]!;
  const trusted =
    ignore.size === 0
      ? all
      : all.filter(
          ({ baseline }) => !ignore.has(grid.first[baseline]!) && !ignore.has(grid.second[baseline]!),
        );
  return { all, first, trusted: trusted.length > MOST_TRUSTED ? thinned(trusted, MOST_OTHERS) : trusted };
}

function ownPoints(
  grid: Grid,
  { all, first }: PlanePoints,
  antenna: number,
  ignore: ReadonlySet<number>,
): Point[] {
  const own: Point[] = [];
  for (const b of grid.touching[antenna]!) {
    const other = grid.first[b] === antenna ? grid.second[b]! : grid.first[b]!;
    if (ignore.has(other)) continue;
    for (let i = first[b]!; i < first[b + 1]!; i++) own.push(all[i]!);
  }
  return own;
}

function levelOf(
  grid: Grid,
  planes: readonly PlanePoints[],
  antenna: number,
  ignore: ReadonlySet<number>,
): AntennaLevel {
  const ratios: number[] = [];
  let [power, expected, variance, silent] = [0, 0, 0, 0];
  const told = new Set<number>();
  for (const points of planes) {
    const own = thinned(ownPoints(grid, points, antenna, ignore), MOST_OWN);
    const all = points.trusted.filter(
      ({ baseline }) => grid.first[baseline] !== antenna && grid.second[baseline] !== antenna,
    );
    const others = thinned(all, MOST_OTHERS);
    const outer = outerLevel(others);
    for (const point of own) {
      const likely = likelyPower(point, others, outer);
      if (!(likely > 0)) continue;
      power += point.power;
      expected += likely;
      variance += point.error ** 2;
      if (point.power < Math.max(0.05 * likely, 4 * point.error)) silent += 1;
      told.add(point.baseline);
      ratios.push(Math.log(Math.max(point.power, point.error * 0.1) / likely) / 2);
    }
  }
  const error = Math.sqrt(variance);
  return {
    power: expected > 0 ? power / expected : Number.NaN,
    powerError: expected > 0 ? error / expected : Number.NaN,
    logAmplitude: median(ratios),
    scatter: robustSigma(ratios),
    below: ratios.filter((ratio) => ratio < 0).length / Math.max(1, ratios.length),
    expected: error > 0 ? expected / error : 0,
    stretches: ratios.length,
    silent: silent / Math.max(1, ratios.length),
    baselines: told.size,
  };
}

function thinned(points: readonly Point[], most: number): readonly Point[] {
  const stride = Math.ceil(points.length / most);
  return points.filter((_, i) => i % stride === 0);
}

/** A source fading outwards makes the outermost baselines faint by nature. */
interface Outer {
  /** the longest spacing of others */
  readonly radius: number;
  /** power there over that of all */
  readonly share: number;
}

const OUTER_SHARE = 0.2;
const FLAT = 0.3;
/** Neighbours further apart than this factor in power tell nothing. */
const MOST_SPREAD = 6;

function outerLevel(others: readonly Point[]): Outer {
  const sorted = [...others].sort((a, b) => Math.hypot(b.u, b.v) - Math.hypot(a.u, a.v));
  const far = sorted.slice(0, Math.max(1, Math.floor(OUTER_SHARE * sorted.length)));
  const powers = (points: readonly Point[]) => median(points.map(({ power }) => power));
  return {
    radius: sorted.length === 0 ? 0 : Math.hypot(sorted[0]!.u, sorted[0]!.v),
    share: powers(far) / powers(others),
  };
}

/** NaN where the neighbours do not tell. */
function likelyPower(point: Point, others: readonly Point[], outer: Outer): number {
  const near = nearest(point, others);
  const radius = Math.hypot(point.u, point.v);
  const beyond = near.filter(({ u, v }) => Math.hypot(u, v) >= radius).length;
  if (beyond < 2 && !(outer.share > FLAT)) return Number.NaN;
  const powers = near.map(({ power }) => power).sort((a, b) => a - b);
  if (powers.length === 0) return Number.NaN;
  // One of five may itself be at fault.
  const [low, high] = powers.length < 4 ? [0, powers.length - 1] : [1, powers.length - 1];
  if (!(powers[high]! < MOST_SPREAD * powers[low]!)) return Number.NaN;
  return median(powers);
}

function nearest(point: Point, others: readonly Point[]): Point[] {
  const near: Point[] = [];
  const distances: number[] = [];
  for (let i = 0; i < others.length; i++) {
    const other = others[i]!;
    // Either way round: a visibility and its conjugate say the same.
    const apart = (other.u - point.u) ** 2 + (other.v - point.v) ** 2;
    const across = (other.u + point.u) ** 2 + (other.v + point.v) ** 2;
    const distance = Math.min(apart, across);
    if (near.length === NEIGHBOURS && !(distance < distances[NEIGHBOURS - 1]!)) continue;
    let at = Math.min(near.length, NEIGHBOURS - 1);
    for (; at > 0 && distances[at - 1]! > distance; at--) {
      distances[at] = distances[at - 1]!;
      near[at] = near[at - 1]!;
    }
    distances[at] = distance;
    near[at] = other;
  }
  return near;
}

function pointsOf(grid: Grid, plane: Plane, stretches: number): Point[] {
  const { baselines, times, cellOf, survey } = grid;
  const points: Point[] = [];
  const length = Math.max(1, Math.ceil(times.length / stretches));
  for (let b = 0; b < baselines; b++) {
    for (let from = 0; from < times.length; from += length) {
      const point = pointOf(grid, plane, b, from, Math.min(times.length, from + length));
      if (point === null) continue;
      let cell = -1;
      for (let t = from; t < Math.min(times.length, from + length) && cell < 0; t++)
        cell = cellOf[t * baselines + b]!;
      points.push({ ...point, baseline: b, u: survey.tracks.u[cell]!, v: survey.tracks.v[cell]! });
    }
  }
  return points;
}

function pointOf(grid: Grid, plane: Plane, b: number, from: number, to: number) {
  const { baselines, segments } = grid;
  let [power, variance, blocks] = [0, 0, 0];
  for (const segment of segments) {
    for (let start = Math.max(from, segment.start); start < Math.min(to, segment.end); start += COHERENT) {
      let [re, im, noise, n] = [0, 0, 0, 0];
      for (let t = start; t < Math.min(start + COHERENT, to, segment.end); t++) {
        const i = t * baselines + b;
        if (Number.isNaN(plane.real[i]!)) continue;
        re += plane.real[i]!;
        im += plane.imag[i]!;
        noise += plane.variance[i]!;
        n += 1;
      }
      if (n === 0) continue;
      power += (re * re + im * im - 2 * noise) / (n * n);
      variance += (2 * noise) ** 2 / n ** 4;
      blocks += 1;
    }
  }
  if (blocks === 0) return null;
  return { power: power / blocks, error: Math.sqrt(variance) / blocks };
}
