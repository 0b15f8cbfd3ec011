/**
 * Takes the sources off an image one after the other: the brightest pixel, a share of it, with the response that it has.
 * @see Hogbom 1974, A&AS 15, 417
 */
import { MAD_TO_SIGMA } from "../../util/statistics.ts";
import type { Patch } from "./patch.ts";

export interface Component {
  readonly x: number;
  readonly y: number;
  flux: number;
}

export interface Peeled {
  readonly components: readonly Component[];
  readonly residual: Float64Array;
  /** rms of the residual over the pixels with a value */
  readonly rms: number;
}

export interface PeelOptions {
  readonly gain: number;
  readonly most: number;
  /** stop where the brightest pixel is below this many robust sigmas of what is left */
  readonly sigmas: number;
  /** and where the faintest is as low as this share of it: both signs alike are no sources */
  readonly balance: number;
}

/** What is left is looked at again after so many components. */
const SIGMA_EVERY = 16;

export function peel(
  pixels: Float64Array,
  known: Uint8Array,
  width: number,
  height: number,
  patch: Patch,
  options: PeelOptions,
): Peeled {
  const residual = Float64Array.from(pixels);
  const found = new Map<number, Component>();
  let floor = Number.POSITIVE_INFINITY;
  for (let step = 0; step < options.most; step++) {
    if (step % SIGMA_EVERY === 0) floor = options.sigmas * robustRms(residual, known);
    const { high, low, at } = extremes(residual, known);
    if (!(high > floor) || high < -low * options.balance) break;
    const [x, y] = [at % width, Math.floor(at / width)];
    const flux = options.gain * high;
    const component = found.get(at);
    if (component === undefined) found.set(at, { x, y, flux });
    else component.flux += flux;
    subtract(residual, width, height, patch, x, y, flux);
  }
  let squares = 0;
  let count = 0;
  for (let i = 0; i < residual.length; i++) {
    if (known[i] === 0) continue;
    squares += residual[i]! ** 2;
    count += 1;
  }
  return { components: [...found.values()], residual, rms: Math.sqrt(squares / Math.max(1, count)) };
}

function extremes(values: Float64Array, known: Uint8Array): { high: number; low: number; at: number } {
  let high = Number.NEGATIVE_INFINITY;
  let low = Number.POSITIVE_INFINITY;
  let at = 0;
  for (let i = 0; i < values.length; i++) {
    if (known[i] === 0) continue;
    const value = values[i]!;
    if (value > high) {
      high = value;
      at = i;
    }
    if (value < low) low = value;
  }
  return { high, low, at };
}

function subtract(
  residual: Float64Array,
  width: number,
  height: number,
  { halfX, halfY, values }: Patch,
  x: number,
  y: number,
  flux: number,
): void {
  const side = 2 * halfX + 1;
  const from = Math.max(0, x - halfX);
  const to = Math.min(width - 1, x + halfX);
  for (let j = Math.max(0, y - halfY); j <= Math.min(height - 1, y + halfY); j++) {
    const row = (j - y + halfY) * side + halfX - x;
    for (let i = from; i <= to; i++) residual[j * width + i]! -= flux * values[row + i]!;
  }
}

/** Pixels that a robust scale is taken from, at most. */
const MOST_SAMPLED = 20_000;

/** Robust sigma about zero of the pixels with a value. */
export function robustRms(values: Float64Array, known: Uint8Array): number {
  const step = Math.max(1, Math.floor(values.length / MOST_SAMPLED));
  const sizes: number[] = [];
  for (let i = 0; i < values.length; i += step) if (known[i] === 1) sizes.push(Math.abs(values[i]!));
  if (sizes.length === 0) return Number.NaN;
  sizes.sort((a, b) => a - b);
  return MAD_TO_SIGMA * sizes[sizes.length >> 1]!;
}
