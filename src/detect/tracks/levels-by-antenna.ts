/**
 * What amplitude the rest of the array makes likely on an antenna's baselines: that of other antennas' baselines near in
 * the uv plane, so that a resolved sky is no antenna's fault.
 */
import { median, robustSigma } from "../../util/statistics.ts";
import type { Grid, Plane } from "./grid.ts";

/**
 * Mean powers of stretches of baselines: of means over a few integrations, noise taken off. Columns: of thousands of
 * antennas there are hundreds of thousands.
 */
interface Points {
  readonly count: number;
  /** (count) ascending */
  readonly baseline: Int32Array;
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly power: Float64Array;
  /** of `power` when there is no signal */
  readonly error: Float64Array;
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
export type LevelPoints = readonly Points[];

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
  readonly all: Points;
  /** (baselines + 1) first point of each */
  readonly first: Int32Array;
  /** numbers of those of no ignored antenna, from which each antenna's others are taken; of very many an even choice */
  readonly trusted: Int32Array;
}

/** Of more than this many, one choice of others serves all antennas. */
const MOST_TRUSTED = 4000;

function planePoints(grid: Grid, all: Points, ignore: ReadonlySet<number>): PlanePoints {
  const first = new Int32Array(grid.baselines + 1);
  for (const baseline of all.baseline) first[baseline + 1]! += 1;
  for (let b = 0; b < grid.baselines; b++) first[b + 1]! += first[b]!;
  const every = Int32Array.from({ length: all.count }, (_, i) => i);
  const trusted =
    ignore.size === 0
      ? every
      : every.filter((i) => {
          const b = all.baseline[i]!;
          return !ignore.has(grid.first[b]!) && !ignore.has(grid.second[b]!);
        });
  return { all, first, trusted: trusted.length > MOST_TRUSTED ? thinned(trusted, MOST_OTHERS) : trusted };
}

function ownPoints(
  grid: Grid,
  { first }: PlanePoints,
  antenna: number,
  ignore: ReadonlySet<number>,
): Int32Array {
  const own: number[] = [];
  for (const b of grid.touching[antenna]!) {
    const other = grid.first[b] === antenna ? grid.second[b]! : grid.first[b]!;
    if (ignore.has(other)) continue;
    for (let i = first[b]!; i < first[b + 1]!; i++) own.push(i);
  }
  return Int32Array.from(own);
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
    const { all } = points;
    const free = points.trusted.filter((i) => {
      const b = all.baseline[i]!;
      return grid.first[b] !== antenna && grid.second[b] !== antenna;
    });
    const others = othersOf(all, thinned(free, MOST_OTHERS));
    const outer = outerLevel(others);
    for (const i of own) {
      const likely = likelyPower(all.u[i]!, all.v[i]!, others, outer);
      if (!(likely > 0)) continue;
      const [ownPower, ownError] = [all.power[i]!, all.error[i]!];
      power += ownPower;
      expected += likely;
      variance += ownError ** 2;
      if (ownPower < Math.max(0.05 * likely, 4 * ownError)) silent += 1;
      told.add(all.baseline[i]!);
      ratios.push(Math.log(Math.max(ownPower, ownError * 0.1) / likely) / 2);
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

function thinned(points: Int32Array, most: number): Int32Array {
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

/** Columns of some points side by side. */
interface Other {
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly radius: Float64Array;
  readonly power: Float64Array;
}

function othersOf(all: Points, which: Int32Array): Other {
  const column = (values: Float64Array) => Float64Array.from(which, (i) => values[i]!);
  const [u, v] = [column(all.u), column(all.v)];
  return { u, v, radius: u.map((own, i) => Math.hypot(own, v[i]!)), power: column(all.power) };
}

function outerLevel({ radius, power }: Other): Outer {
  const sorted = Array.from(radius.keys()).sort((a, b) => radius[b]! - radius[a]!);
  const far = sorted.slice(0, Math.max(1, Math.floor(OUTER_SHARE * sorted.length)));
  return {
    radius: sorted.length === 0 ? 0 : radius[sorted[0]!]!,
    share: median(far.map((i) => power[i]!)) / median(power),
  };
}

/** NaN where the neighbours do not tell. */
function likelyPower(u: number, v: number, others: Other, outer: Outer): number {
  const near = nearest(u, v, others);
  const radius = Math.hypot(u, v);
  const beyond = near.filter((i) => others.radius[i]! >= radius).length;
  if (beyond < 2 && !(outer.share > FLAT)) return Number.NaN;
  const powers = near.map((i) => others.power[i]!).sort((a, b) => a - b);
  if (powers.length === 0) return Number.NaN;
  // One of five may itself be at fault.
  const [low, high] = powers.length < 4 ? [0, powers.length - 1] : [1, powers.length - 1];
  if (!(powers[high]! < MOST_SPREAD * powers[low]!)) return Number.NaN;
  return median(powers);
}

/** Places in `others`. */
function nearest(u: number, v: number, others: Other): number[] {
  const near: number[] = [];
  const distances: number[] = [];
  let farthest = Number.POSITIVE_INFINITY;
  for (let i = 0; i < others.u.length; i++) {
    const otherU = others.u[i]!;
    const otherV = others.v[i]!;
    // Either way round: a visibility and its conjugate say the same.
    const apart = (otherU - u) ** 2 + (otherV - v) ** 2;
    const across = (otherU + u) ** 2 + (otherV + v) ** 2;
    const distance = Math.min(apart, across);
    if (near.length === NEIGHBOURS && !(distance < farthest)) continue;
    let at = Math.min(near.length, NEIGHBOURS - 1);
    for (; at > 0 && distances[at - 1]! > distance; at--) {
      distances[at] = distances[at - 1]!;
      near[at] = near[at - 1]!;
    }
    distances[at] = distance;
    near[at] = i;
    farthest = distances.at(-1)!;
  }
  return near;
}

function pointsOf(grid: Grid, plane: Plane, stretches: number): Points {
  const { baselines, times, cellOf, survey } = grid;
  const length = Math.max(1, Math.ceil(times.length / stretches));
  const room = baselines * Math.ceil(times.length / length);
  const baseline = new Int32Array(room);
  const [u, v, power, error] = Array.from({ length: 4 }, () => new Float64Array(room)) as Four;
  let count = 0;
  for (let b = 0; b < baselines; b++) {
    for (let from = 0; from < times.length; from += length) {
      const point = pointOf(grid, plane, b, from, Math.min(times.length, from + length));
      if (point === null) continue;
      let cell = -1;
      for (let t = from; t < Math.min(times.length, from + length) && cell < 0; t++)
        cell = cellOf[t * baselines + b]!;
      baseline[count] = b;
      u[count] = survey.tracks.u[cell]!;
      v[count] = survey.tracks.v[cell]!;
      power[count] = point.power;
      error[count] = point.error;
      count += 1;
    }
  }
  const used = (column: Float64Array) => column.subarray(0, count);
  return {
    count,
    baseline: baseline.subarray(0, count),
    u: used(u),
    v: used(v),
    power: used(power),
    error: used(error),
  };
}

type Four = [Float64Array, Float64Array, Float64Array, Float64Array];

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
