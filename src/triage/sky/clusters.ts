/** Components that belong together, as sources; and the beam that the brightest of them shows. */
import { cholesky, solveCholesky } from "../linear.ts";
import type { PixelGaussian } from "./patch.ts";
import type { Component } from "./peel.ts";

/** A source in the image, in pixels from the first. */
export interface Cluster {
  readonly flux: number;
  readonly x: number;
  readonly y: number;
  /** second moments of its components, pixels squared: xx, xy, yy */
  readonly moments: readonly [number, number, number];
  /** larger than a beam */
  readonly extended: boolean;
}

/** Components nearer than this, in full widths of the beam, are of one source. */
const LINK = 0.7;
/** A source whose components scatter by more than this, in full widths of the beam, is no point. */
const POINT_SCATTER = 0.45;

/** Distance in full widths at half maximum. */
export function inBeams(g: PixelGaussian, dx: number, dy: number): number {
  return Math.sqrt((g.a * dx * dx + 2 * g.b * dx * dy + g.c * dy * dy) / (4 * Math.LN2));
}

/** Brightest first. */
export function clustersOf(components: readonly Component[], beam: PixelGaussian): Cluster[] {
  const group = components.map((_, i) => i);
  const rootOf = (i: number): number => {
    let at = i;
    while (group[at] !== at) at = group[at]!;
    return at;
  };
  for (let i = 0; i < components.length; i++) {
    for (let j = 0; j < i; j++) {
      const [p, q] = [components[i]!, components[j]!];
      if (inBeams(beam, p.x - q.x, p.y - q.y) < LINK) group[rootOf(i)] = rootOf(j);
    }
  }
  const members = new Map<number, Component[]>();
  components.forEach((component, i) => {
    const root = rootOf(i);
    members.set(root, [...(members.get(root) ?? []), component]);
  });
  return [...members.values()].map((parts) => clusterOf(parts, beam)).sort((a, b) => b.flux - a.flux);
}

function clusterOf(parts: readonly Component[], beam: PixelGaussian): Cluster {
  let [flux, x, y] = [0, 0, 0];
  for (const part of parts) {
    flux += part.flux;
    x += part.flux * part.x;
    y += part.flux * part.y;
  }
  x /= flux;
  y /= flux;
  let [xx, xy, yy] = [0, 0, 0];
  for (const part of parts) {
    const [dx, dy] = [part.x - x, part.y - y];
    xx += (part.flux / flux) * dx * dx;
    xy += (part.flux / flux) * dx * dy;
    yy += (part.flux / flux) * dy * dy;
  }
  const largest = (xx + yy) / 2 + Math.hypot((xx - yy) / 2, xy);
  const angle = 0.5 * Math.atan2(2 * xy, xx - yy);
  const scatter = inBeams(beam, Math.sqrt(largest) * Math.cos(angle), Math.sqrt(largest) * Math.sin(angle));
  return { flux, x, y, moments: [xx, xy, yy], extended: scatter > POINT_SCATTER };
}

/** Pixels of the core: those above this share of the peak. */
const CORE = 0.45;

/**
 * The Gaussian of the brightest source's core, by least squares on the logarithm.
 *
 * @returns null where the core has too few pixels
 */
export function coreGaussian(
  pixels: Float64Array,
  known: Uint8Array,
  width: number,
  height: number,
): PixelGaussian | null {
  let peak = -1;
  for (let i = 0; i < pixels.length; i++) {
    if (known[i] === 1 && (peak < 0 || pixels[i]! > pixels[peak]!)) peak = i;
  }
  if (peak < 0 || !(pixels[peak]! > 0)) return null;
  const core = coreOf(pixels, known, width, height, peak);
  if (core.length < 7) return null;
  // ln I = p0 + p1 x + p2 y - a x^2 - 2 b x y - c y^2
  const n = 6;
  const matrix = new Float64Array(n * n);
  const right = new Float64Array(n);
  for (const at of core) {
    const [x, y] = [(at % width) - (peak % width), Math.floor(at / width) - Math.floor(peak / width)];
    const row = [1, x, y, -x * x, -2 * x * y, -y * y];
    const value = Math.log(pixels[at]! / pixels[peak]!);
    const weight = (pixels[at]! / pixels[peak]!) ** 2;
    for (let i = 0; i < n; i++) {
      right[i]! += weight * row[i]! * value;
      for (let j = 0; j < n; j++) matrix[i * n + j]! += weight * row[i]! * row[j]!;
    }
  }
  const [, , , a, b, c] = solveCholesky(cholesky(matrix, n), right);
  return a! > 0 && a! * c! - b! * b! > 0 ? { a: a!, b: b!, c: c! } : null;
}

/** Pixels above the share of the peak that hang together with it. */
function coreOf(
  pixels: Float64Array,
  known: Uint8Array,
  width: number,
  height: number,
  peak: number,
): number[] {
  const floor = CORE * pixels[peak]!;
  const seen = new Set([peak]);
  const core = [peak];
  for (let i = 0; i < core.length; i++) {
    const [x, y] = [core[i]! % width, Math.floor(core[i]! / width)];
    for (const [dx, dy] of [
      [1, 0],
      [-1, 0],
      [0, 1],
      [0, -1],
    ] as const) {
      if (x + dx < 0 || x + dx >= width || y + dy < 0 || y + dy >= height) continue;
      const at = core[i]! + dx + dy * width;
      if (seen.has(at) || known[at] === 0 || !(pixels[at]! > floor)) continue;
      seen.add(at);
      core.push(at);
    }
  }
  return core;
}
