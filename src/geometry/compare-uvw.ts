/**
 * u, v, w of a file against those that its antenna table, times and phase centre give: which convention holds, and
 * what is wrong where none does.
 *
 * Writers differ in whether they precess, which sidereal time they take, and in the sign; those differences are up to
 * a few tenths of a degree and are not faults. Tolerance: 1 % of |uvw|, common practice, no source.
 */
import { SPEED_OF_LIGHT } from "../util/constants.ts";
import { AXIS_MAPS, type AxisMap, type Fit, SAME_AXES, SpacingSums, type Spacings } from "./spacing-sums.ts";

/** Relative rms up to which u, v, w agree. */
export const AGREEMENT = 0.01;
/** A measured axis below this share of the expected |uvw| holds nothing. */
const NOTHING = 1e-6;

export interface Orientation {
  readonly fit: Fit;
  /** measured axes that are zero */
  readonly zero: readonly [boolean, boolean, boolean];
  readonly mirrored: boolean;
  readonly convention: "catalogue" | "of-date";
  /** declination of that convention, radians */
  readonly declination: number;
  /** of the convention with u, v, w taken as they are, either sign: the rms before any repair */
  readonly asIs: number;
}

export interface Place {
  readonly convention: "catalogue" | "of-date";
  /** spacings with the hour angles of this place */
  readonly spacings: Spacings;
  readonly declination: number;
}

/**
 * The orientation that fits best: the one taken for granted unless another is much better.
 * @param places the phase centre by each convention, the same spacings
 * @param turnKnown whether the frame ties the hour angle down (geocentric) or leaves a turn about the pole free
 */
export function orient(places: readonly Place[], turnKnown: boolean): Orientation {
  let best: Orientation | null = null;
  let plain = Number.POSITIVE_INFINITY;
  for (const mirrored of [false, true]) {
    for (const turn of turnKnown ? [0, null] : [null]) {
      for (const place of places) {
        const sums = new SpacingSums(place.spacings, place.declination, mirrored);
        const zero = [0, 1, 2].map((axis) => sums.share(axis) < NOTHING) as [boolean, boolean, boolean];
        const usual = !mirrored && (turn === 0 || !turnKnown);
        const fits = AXIS_MAPS.map((map) => sums.fit(map, zero, turn)).filter((fit) => fit.scale > 0);
        if (usual)
          plain = Math.min(
            plain,
            ...fits
              .slice(0, 2)
              .filter(isUsual)
              .map((fit) => fit.rms),
          );
        for (const fit of fits) {
          const { convention, declination } = place;
          const candidate = { fit, zero, mirrored, convention, declination, asIs: plain };
          if (best === null || isBetter(candidate, best)) best = candidate;
        }
      }
    }
  }
  return { ...best!, asIs: plain };
}

function isUsual({ map }: Fit): boolean {
  return (
    map.axis.every((axis, k) => axis === SAME_AXES.axis[k]) &&
    Math.abs(map.sign[0] + map.sign[1] + map.sign[2]) === 3
  );
}

/**
 * Candidates come in order of likelihood. A later one must do much better than one that disagrees; among those that
 * agree only a clear gain counts, of conventions that differ by less than the tolerance.
 */
function isBetter(candidate: Orientation, best: Orientation): boolean {
  const stranger =
    candidate.mirrored !== best.mirrored ||
    candidate.fit.map !== best.fit.map ||
    (candidate.fit.turn !== 0) !== (best.fit.turn !== 0);
  if (!stranger) return candidate.fit.rms < best.fit.rms * 0.9;
  return best.fit.rms > AGREEMENT && candidate.fit.rms < best.fit.rms / 2;
}

/** Whether all signs are turned, and which single axis is besides; null when none is. */
export function signsOf(map: AxisMap): { readonly reversed: boolean; readonly flipped: number | null } {
  const negative = map.sign.filter((sign) => sign < 0).length;
  const reversed = negative >= 2;
  const odd = map.sign.findIndex((sign) => sign < 0 !== reversed);
  return { reversed, flipped: odd < 0 ? null : odd };
}

/** Units that u, v, w are found in where seconds are due, by the factor they make. */
export function unitOfScale(scale: number, frequency: number): string | null {
  const candidates: readonly (readonly [string, number])[] = [
    ["metres", SPEED_OF_LIGHT],
    ["kilometres", 299792.458],
    ["wavelengths", frequency],
    ["kilowavelengths", frequency / 1e3],
    ["nanoseconds", 1e9],
    ["microseconds", 1e6],
    ["milliseconds", 1e3],
  ];
  return candidates.find(([, factor]) => Math.abs(scale / factor - 1) < 0.03)?.[0] ?? null;
}

/** Expected u, v, w of spacing `i` in metres, in the orientation found, into `out`. */
export function fillExpected(
  spacings: Pick<Spacings, "x" | "y" | "z" | "hourAngle">,
  orientation: Orientation,
  i: number,
  out: Float64Array,
): void {
  const { mirrored, declination, fit } = orientation;
  const angle = spacings.hourAngle[i]! + fit.turn;
  const x = spacings.x[i]!;
  const y = mirrored ? -spacings.y[i]! : spacings.y[i]!;
  const z = spacings.z[i]!;
  const meridian = Math.cos(angle) * x - Math.sin(angle) * y;
  out[0] = Math.sin(angle) * x + Math.cos(angle) * y;
  out[1] = -Math.sin(declination) * meridian + Math.cos(declination) * z;
  out[2] = Math.cos(declination) * meridian + Math.sin(declination) * z;
}

/**
 * u, v, w of spacing `i` as the file means them: axes put right, scale and sign taken out; NaN on an axis that is
 * zero.
 */
export function fillRepaired(
  spacings: Spacings,
  orientation: Orientation,
  i: number,
  out: Float64Array,
): void {
  const { map, scale } = orientation.fit;
  const measured = [spacings.u[i]!, spacings.v[i]!, spacings.w[i]!];
  for (let k = 0; k < 3; k++) {
    out[map.axis[k]!] = orientation.zero[k]
      ? Number.NaN
      : (spacings.sign[i]! * map.sign[k]! * measured[k]!) / scale;
  }
}
