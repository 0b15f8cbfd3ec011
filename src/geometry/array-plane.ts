/**
 * The plane of an array, from the u, v, w of some moments: how far each antenna is off it, and the direction in which
 * the array is coplanar, so that a source there has no w term.
 */
import { type Graph, solveDifferences } from "./antenna-coordinates.ts";
import { fitArrayPlane, heightOff } from "./plane.ts";
import { baselineOf } from "./uvw.ts";

/** The spacings of one moment, metres; (pairs) each. */
export interface PlaneMoment {
  readonly graph: Graph;
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly w: Float64Array;
  /** radians, of the frame's meridian; NaN unknown */
  readonly hourAngle: number;
}

export interface ArrayHeights {
  /** (antennas) metres off the plane of most, positive on the side of the sources; NaN unknown */
  readonly heights: Float64Array;
  /** radians: the direction in which the array is coplanar; NaN unknown */
  readonly hourAngle: number;
  readonly declination: number;
}

/**
 * @param declination of the field, radians; NaN leaves the direction unknown
 * @returns null when no moment has antennas enough for a plane
 */
export function arrayHeights(
  antennas: number,
  moments: readonly PlaneMoment[],
  declination: number,
): ArrayHeights | null {
  const seen: number[][] = Array.from({ length: antennas }, () => []);
  const direction = [0, 0, 0];
  for (const moment of moments) {
    const normal = addMoment(moment, seen);
    if (normal === null) continue;
    const [x, y, z] = baselineOf(normal, moment.hourAngle, declination);
    direction[0]! += x;
    direction[1]! += y;
    direction[2]! += z;
  }
  if (seen.every((heights) => heights.length === 0)) return null;
  const [x, y, z] = direction as [number, number, number];
  return {
    heights: Float64Array.from(seen, median),
    hourAngle: Math.atan2(-y, x),
    declination: Math.atan2(z, Math.hypot(x, y)),
  };
}

/** Add the heights of one moment; the unit normal of its plane in (u, v, w), or null when it has no plane. */
function addMoment({ graph, u, v, w }: PlaneMoment, seen: number[][]): [number, number, number] | null {
  const solved = solveDifferences(graph, new Float64Array(u.length).fill(1), [u, v, w]);
  if (solved === null) return null;
  const present = [...new Set([...graph.first, ...graph.second])].sort((a, b) => a - b);
  const column = (k: number) => Float64Array.from(present, (antenna) => solved[k]![antenna]!);
  const [pu, pv, pw] = [column(0), column(1), column(2)];
  const plane = fitArrayPlane(pu, pv, pw);
  if (plane === null) return null;
  present.forEach((antenna, i) => {
    seen[antenna]!.push(heightOff(plane, pu[i]!, pv[i]!, pw[i]!));
  });
  const length = Math.sqrt(1 + plane.a ** 2 + plane.b ** 2);
  return [-plane.a / length, -plane.b / length, 1 / length];
}

function median(values: readonly number[]): number {
  if (values.length === 0) return Number.NaN;
  const sorted = [...values].sort((a, b) => a - b);
  return (sorted[(sorted.length - 1) >> 1]! + sorted[sorted.length >> 1]!) / 2;
}
