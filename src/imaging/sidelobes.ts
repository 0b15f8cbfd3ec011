/** The sidelobes of a dirty beam inside the field: the worst of them, where it is, and their rms. */
import { interpolatedPixel, KERNEL } from "./beam-resample.ts";
import { beamPixel, type HalfBeam } from "./beam-transform.ts";
import type { Ellipse } from "./main-lobe.ts";

export interface Sidelobes {
  /** the local extremum with the largest |value| outside the main lobe, of the peak; 0 when there is none */
  readonly peak: number;
  /** radians; NaN when there is none. The beam is symmetric: the one to the north, or due east. */
  readonly east: number;
  readonly north: number;
  /** of the peak, over the field outside the ellipse of twice the half-maximum axes */
  readonly rms: number;
}

/** Half-maximum radii inside which nothing is a sidelobe; the first of a uniform disk is at 2.32, of a ring at 2.52. */
const LOBE_PEAK = 1.5;
const LOBE_RMS = 2;
/** Extrema looked at more closely than the pixels. */
const CANDIDATES = 24;

/**
 * @param field full width, radians: sidelobes are those within the circle of this diameter
 * @param exact the beam at any place, for the last step to the worst one's peak
 * @param lobe main lobe; where it is unknown, the peak pixel and its neighbours stand for it
 */
export function findSidelobes(
  beam: HalfBeam,
  lobe: Ellipse,
  field: number,
  exact: (l: number, m: number) => number,
): Sidelobes {
  const radius = Math.min(field / 2, (beam.reach - 1) * beam.cell);
  const form = lobeForm(lobe, beam.cell);
  const limit = (radius / beam.cell) ** 2;
  const found: { value: number; column: number; row: number }[] = [];
  let squares = 0;
  let count = 0;
  let least = 0;
  for (let row = 0; row < beam.reach; row++) {
    for (let column = -beam.reach + 1; column < beam.reach; column++) {
      // The row through the peak is its own mirror image.
      if (column * column + row * row > limit || (row === 0 && column < 0)) continue;
      const distance = form(column, row);
      const value = beamPixel(beam, column, row);
      if (distance > LOBE_RMS * LOBE_RMS) {
        squares += value * value;
        count += 1;
      }
      if (distance <= LOBE_PEAK * LOBE_PEAK || Math.abs(value) <= least) continue;
      if (!isExtremum(beam, column, row, value)) continue;
      found.push({ value, column, row });
      if (found.length > 8 * CANDIDATES) least = keepLargest(found);
    }
  }
  keepLargest(found);
  let best = { value: 0, column: Number.NaN, row: Number.NaN };
  for (const candidate of found) {
    const closer = climb(
      candidate,
      (column, row) => interpolatedPixel(beam, column, row),
      beam.reach - KERNEL,
      0.5,
      5,
    );
    if (Math.abs(closer.value) > Math.abs(best.value)) best = closer;
  }
  if (best.value !== 0) {
    const start = { ...best, value: exact(best.column * beam.cell, best.row * beam.cell) };
    best = climb(
      start,
      (column, row) => exact(column * beam.cell, row * beam.cell),
      beam.reach - KERNEL,
      0.1,
      1,
    );
  }
  return {
    peak: best.value,
    east: best.column * beam.cell,
    north: best.row * beam.cell,
    rms: count === 0 ? 0 : Math.sqrt(squares / count),
  };
}

/** Squared distance from the peak in units of the half-maximum radius in that direction. */
function lobeForm(lobe: Ellipse, cell: number): (column: number, row: number) => number {
  if (!(lobe.major > 0)) return (column, row) => column * column + row * row;
  const sine = Math.sin(lobe.positionAngle);
  const cosine = Math.cos(lobe.positionAngle);
  const a = lobe.major / 2 / cell;
  const b = lobe.minor / 2 / cell;
  return (column, row) => {
    const along = column * sine + row * cosine;
    const across = column * cosine - row * sine;
    return (along / a) ** 2 + (across / b) ** 2;
  };
}

function isExtremum(beam: HalfBeam, column: number, row: number, value: number): boolean {
  const sign = value < 0 ? -1 : 1;
  for (let dr = -1; dr <= 1; dr++) {
    for (let dc = -1; dc <= 1; dc++) {
      if (sign * beamPixel(beam, column + dc, row + dr) > sign * value) return false;
    }
  }
  return true;
}

/** Keep the largest few; the |value| that the next must exceed. */
function keepLargest(found: { value: number; column: number; row: number }[]): number {
  found.sort((a, b) => Math.abs(b.value) - Math.abs(a.value) || a.row - b.row || a.column - b.column);
  if (found.length > CANDIDATES) found.length = CANDIDATES;
  return found.length < CANDIDATES ? 0 : Math.abs(found.at(-1)!.value);
}

interface Extremum {
  readonly value: number;
  /** pixels from the centre, not whole */
  readonly column: number;
  readonly row: number;
}

/**
 * From a place near an extremum to its top, by parabolas through its neighbours.
 * @param reach pixels from the centre beyond which nothing is asked
 * @param firstStep pixels to the neighbours, halved each round
 */
function climb(
  start: Extremum,
  at: (column: number, row: number) => number,
  reach: number,
  firstStep: number,
  rounds: number,
): Extremum {
  const sign = Math.sign(start.value);
  let best = start;
  for (let round = 0, step = firstStep; round < rounds; round++, step /= 2) {
    const { column, row } = best;
    if (Math.max(Math.abs(column), Math.abs(row)) + 2 * step > reach) break;
    const centre = sign * best.value;
    const dc = step * vertex(sign * at(column - step, row), centre, sign * at(column + step, row));
    const dr = step * vertex(sign * at(column, row - step), centre, sign * at(column, row + step));
    const value = at(column + dc, row + dr);
    if (sign * value >= centre) best = { value, column: column + dc, row: row + dr };
  }
  return best;
}

/** Place of the top of the parabola through values at -1, 0, 1, kept within them. */
function vertex(left: number, middle: number, right: number): number {
  const curvature = left - 2 * middle + right;
  if (!(curvature < 0)) return right > left ? 1 : right < left ? -1 : 0;
  return Math.min(1, Math.max(-1, (0.5 * (left - right)) / curvature));
}
