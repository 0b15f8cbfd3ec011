/**
 * Antenna positions that are wrong in the table and in u, v, w alike, from the phases of a source that dominates the
 * field: an antenna that stands (dx, dy) from its place delays the source by (dx cos H - dy sin H) cos d, a sinusoid
 * in hour angle H that grows with frequency. Along the Earth's axis an offset only adds a constant, which cannot be
 * told from the electronics'.
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., section 4.4
 */
import { SPEED_OF_LIGHT } from "../util/constants.ts";
import { antennaPhasors, type BaselineValues, type Phasors } from "./antenna-phases.ts";

/** Visibilities of one moment and frequency. */
export interface PhaseMoment extends BaselineValues {
  /** radians */
  readonly hourAngle: number;
}

export interface PhaseOffset {
  /** metres, in the plane of the equator, size only: the sign of phases differs between writers */
  readonly offset: number;
  /** 1 sigma: of the fit, or the scatter of the other antennas, whichever is larger */
  readonly error: number;
}

const LEAST_ANTENNAS = 5;
const LEAST_MOMENTS = 10;
/** Radians of hour angle: over less, a sinusoid is a drift. */
const LEAST_RANGE = 0.35;
/** Share of the amplitude that antenna phases must explain: below it no source dominates. */
const LEAST_COHERENCE = 0.6;

/**
 * @param moments of one frequency, in time order
 * @returns by antenna index, null where it has too few moments; null when nothing can be told
 */
export function phaseOffsets(
  antennas: number,
  moments: readonly PhaseMoment[],
  frequency: number,
  declination: number,
): (PhaseOffset | null)[] | null {
  const solved = moments.map((moment) => antennaPhasors(moment));
  const good = moments.flatMap((moment, i) =>
    solved[i]!.coherence >= LEAST_COHERENCE ? [{ hourAngle: moment.hourAngle, ...solved[i]! }] : [],
  );
  if (antennas < LEAST_ANTENNAS || good.length < Math.max(LEAST_MOMENTS, moments.length / 2)) return null;
  const hours = good.map(({ hourAngle }) => hourAngle);
  if (Math.max(...hours) - Math.min(...hours) < LEAST_RANGE) return null;
  const reference = commonest(antennas, good);
  const scale = SPEED_OF_LIGHT / (2 * Math.PI * frequency * Math.cos(declination));
  const fits = Array.from({ length: antennas }, (_, antenna) => fitOne(good, antenna, reference, scale));
  return relativeToMost(fits);
}

type Good = Phasors & { readonly hourAngle: number };

/** The antenna that most moments have. */
function commonest(antennas: number, good: readonly Good[]): number {
  let best = 0;
  let most = -1;
  for (let antenna = 0; antenna < antennas; antenna++) {
    const count = good.filter(({ re, im }) => re[antenna] !== 0 || im[antenna] !== 0).length;
    if (count > most) {
      best = antenna;
      most = count;
    }
  }
  return best;
}

interface Fit {
  readonly dx: number;
  readonly dy: number;
  readonly error: number;
}

/** Least squares of the unwrapped phase against cos H, -sin H and a constant. */
function fitOne(good: readonly Good[], antenna: number, reference: number, scale: number): Fit | null {
  const hour: number[] = [];
  const phase: number[] = [];
  for (const { re, im, hourAngle } of good) {
    const cr = re[antenna]! * re[reference]! + im[antenna]! * im[reference]!;
    const ci = im[antenna]! * re[reference]! - re[antenna]! * im[reference]!;
    if (cr === 0 && ci === 0) continue;
    const here = Math.atan2(ci, cr);
    const last = phase.at(-1);
    phase.push(last === undefined ? here : here - 2 * Math.PI * Math.round((here - last) / (2 * Math.PI)));
    hour.push(hourAngle);
  }
  if (hour.length < LEAST_MOMENTS) return null;
  const n = hour.length;
  const cos = hour.map(Math.cos);
  const sin = hour.map((h) => -Math.sin(h));
  const [mc, ms, mp] = [mean(cos), mean(sin), mean(phase)];
  let [cc, cs, ss, cp, sp] = [0, 0, 0, 0, 0];
  for (let k = 0; k < n; k++) {
    const [c, s, p] = [cos[k]! - mc, sin[k]! - ms, phase[k]! - mp];
    cc += c * c;
    cs += c * s;
    ss += s * s;
    cp += c * p;
    sp += s * p;
  }
  const determinant = cc * ss - cs * cs;
  if (!(determinant > 1e-12 * cc * ss)) return null;
  const x = (cp * ss - sp * cs) / determinant;
  const y = (sp * cc - cp * cs) / determinant;
  const rest = phase.map((p, k) => p - mp - x * (cos[k]! - mc) - y * (sin[k]! - ms));
  const variance = (rest.reduce((sum, r) => sum + r * r, 0) / (n - 3)) * correlationFactor(rest);
  const error = Math.sqrt((variance * (cc + ss)) / determinant);
  return { dx: x * scale, dy: y * scale, error: error * Math.abs(scale) };
}

/** What residuals that follow each other add to a variance: (1 + r)/(1 - r) of their lag-1 correlation. */
function correlationFactor(rest: readonly number[]): number {
  let [lagged, squares] = [0, 0];
  for (let k = 0; k < rest.length; k++) {
    squares += rest[k]! * rest[k]!;
    if (k > 0) lagged += rest[k]! * rest[k - 1]!;
  }
  const r = squares > 0 ? Math.min(0.98, Math.max(0, lagged / squares)) : 0;
  return (1 + r) / (1 - r);
}

/** Offsets from what most antennas have, so that the reference may be the one that is off. */
function relativeToMost(fits: readonly (Fit | null)[]): (PhaseOffset | null)[] {
  const known = fits.filter((fit): fit is Fit => fit !== null);
  const mx = median(known.map(({ dx }) => dx));
  const my = median(known.map(({ dy }) => dy));
  const sizes = fits.map((fit) => (fit === null ? null : Math.hypot(fit.dx - mx, fit.dy - my)));
  return fits.map((fit, i) => {
    if (fit === null) return null;
    const others = sizes.filter((size, j): size is number => size !== null && j !== i);
    // The size of a two-dimensional scatter of sigma a component has the median 1.177 sigma.
    return { offset: sizes[i]!, error: Math.max(fit.error, median(others) / 1.1774) };
  });
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

function median(values: readonly number[]): number {
  if (values.length === 0) return Number.NaN;
  const sorted = [...values].sort((a, b) => a - b);
  return (sorted[(sorted.length - 1) >> 1]! + sorted[sorted.length >> 1]!) / 2;
}
