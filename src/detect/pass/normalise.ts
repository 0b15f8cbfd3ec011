/**
 * Residual powers over their noise. The noise is the plane's own: by channel from the median over time, by block of
 * integrations from a low quantile over everything in it, so that what is elevated now and then, or in a few channels,
 * stands out, while an antenna that is noisy for a while or a passband that lets less noise through does not.
 */
import { mad } from "../../util/statistics.ts";
import { medianInPlace, selectKth } from "../statistics/order.ts";
import type { Plane } from "./plane.ts";

/** Rows from which each channel has a noise of its own, and how many are looked at. */
const FEWEST_ROWS = 8;
const MOST_ROWS = 64;
/** Channels this far apart have about the same noise. */
const SMOOTH_REACH = 3;
/** Noise of a channel above this many times that of the quieter part of the band is not noise. */
const MOST_NOISE = 2;
const QUIET_QUANTILE = 0.4;
/** Integrations that share a noise, from the most to the fewest. */
const BLOCKS = [32, 8];
const BLOCK_CAP = 1;
const BLOCK_LEAST = 64;
/** Standard errors that a block's noise must differ by to count, and the relative error times sqrt(samples). */
const BLOCK_SIGNIFICANCE = 3;
const BLOCK_ERROR = 1.36;

/** Squared share of the source's amplitude that the background may be wrong by: 2 %. Common practice, no source. */
const IMPERFECTION = 0.02 ** 2;
/** The band's shape is not taken to be smaller than this. */
const LEAST_SHAPE = 1e-4;
/** Powers of a row are capped here for its noise. */
const ROW_CAP = 3;

export class Normaliser {
  /** (columns) 2 sigma^2 of the plane; NaN where unknown */
  noise = new Float64Array(0);
  /** (rows) noise power over the plane's, robust; NaN without samples */
  rowNoise = new Float32Array(0);
  private work = new Float64Array(0);
  private raw = new Float64Array(0);

  /**
   * Divide the plane's powers by their noise.
   *
   * @param shape (columns) squared size of the band's shape, which noise before the passband shares
   * @returns 2 sigma^2 typical of the plane, NaN when nothing is usable
   */
  apply(plane: Plane, shape: Float64Array): number {
    const { rows, columns, power, marks } = plane;
    this.resize(rows, columns);
    if (rows >= FEWEST_ROWS) this.noiseByColumn(plane, shape);
    else this.noise.fill(this.pooledNoise(plane), 0, columns);
    const { noise, rowNoise } = this;
    for (let row = 0; row < rows; row++) {
      let sum = 0;
      let count = 0;
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (marks[i] !== 0) {
          power[i] = 0;
          continue;
        }
        const p = power[i]! / noise[c]!;
        power[i] = p;
        if (!(p >= 0)) {
          // Without a noise to compare with nothing can be said of the sample.
          marks[i] = 2;
          continue;
        }
        sum += Math.min(p, ROW_CAP);
        count += 1;
      }
      rowNoise[row] = factorOfCapped(sum / count, ROW_CAP);
    }
    for (const blockRows of BLOCKS) this.levelBlocks(plane, blockRows);
    this.allowImperfection(plane);
    let total = 0;
    let known = 0;
    for (let c = 0; c < columns; c++) {
      if (!(noise[c]! > 0)) continue;
      total += noise[c]!;
      known += 1;
    }
    return total / known;
  }

  private resize(rows: number, columns: number): void {
    if (this.noise.length < columns) {
      this.noise = new Float64Array(columns);
      this.raw = new Float64Array(columns);
    }
    if (this.rowNoise.length < rows) this.rowNoise = new Float32Array(rows);
    const work = Math.max(columns, MOST_ROWS, Math.min(rows * columns, 4096));
    if (this.work.length < work) this.work = new Float64Array(work);
  }

  private noiseByColumn({ rows, columns, power, marks }: Plane, shape: Float64Array): void {
    const { work, raw, noise } = this;
    const step = Math.max(1, rows / MOST_ROWS);
    let known = 0;
    for (let c = 0; c < columns; c++) {
      let count = 0;
      for (let at = 0; at < rows && count < MOST_ROWS; at += step) {
        const i = Math.floor(at) * columns + c;
        if (marks[i] === 0) work[count++] = power[i]!;
      }
      raw[c] = count >= FEWEST_ROWS / 2 ? medianInPlace(work, count) / Math.LN2 : Number.NaN;
      if (raw[c]! > 0) known += 1;
    }
    const follows = this.followsShape(columns, shape);
    if (follows) for (let c = 0; c < columns; c++) raw[c]! /= Math.max(shape[c]!, LEAST_SHAPE);
    const quiet = this.quietNoise(columns, known);
    for (let c = 0; c < columns; c++) {
      let count = 0;
      for (let k = Math.max(0, c - SMOOTH_REACH); k <= Math.min(columns - 1, c + SMOOTH_REACH); k++) {
        if (raw[k]! > 0) work[count++] = raw[k]!;
      }
      const level = count === 0 ? Number.NaN : Math.min(medianInPlace(work, count), MOST_NOISE * quiet);
      noise[c] = follows ? level * Math.max(shape[c]!, LEAST_SHAPE) : level;
    }
  }

  /** What a small error of the background explains is not outlying; it keeps its place above the median. */
  private allowImperfection({ rows, columns, power, modelReal, modelImag }: Plane): void {
    const { noise } = this;
    for (let row = 0; row < rows; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        const p = power[i]!;
        if (!(p > Math.LN2)) continue;
        const size = modelReal[i]! * modelReal[i]! + modelImag[i]! * modelImag[i]!;
        power[i] = Math.max(Math.LN2, p / (1 + (IMPERFECTION * size) / noise[c]!));
      }
    }
  }

  /** Whether the noise goes along the band as the shape does, rather than being the same everywhere. */
  private followsShape(columns: number, shape: Float64Array): boolean {
    const { raw } = this;
    const flat = new Float64Array(columns);
    const shaped = new Float64Array(columns);
    for (let c = 0; c < columns; c++) {
      flat[c] = Math.log(raw[c]!);
      shaped[c] = flat[c]! - Math.log(Math.max(shape[c]!, LEAST_SHAPE));
    }
    return mad(shaped) < mad(flat);
  }

  private quietNoise(columns: number, known: number): number {
    let count = 0;
    for (let c = 0; c < columns; c++) if (this.raw[c]! > 0) this.work[count++] = this.raw[c]!;
    return selectKth(this.work, count, Math.floor(known * QUIET_QUANTILE));
  }

  private pooledNoise({ rows, columns, power, marks }: Plane): number {
    const { work } = this;
    const step = Math.max(1, Math.floor((rows * columns) / 4096));
    let count = 0;
    for (let i = 0; i < rows * columns && count < work.length; i += step) {
      if (marks[i] === 0) work[count++] = power[i]!;
    }
    const noise = medianInPlace(work, count) / Math.LN2;
    return noise > 0 ? noise : Number.NaN;
  }

  /** Take out the noise that blocks of integrations have more or less than the plane. */
  private levelBlocks({ rows, columns, power, marks }: Plane, blockRows: number): void {
    for (let first = 0; first < rows; first += blockRows) {
      const from = first * columns;
      const to = Math.min(rows, first + blockRows) * columns;
      let sum = 0;
      let count = 0;
      for (let i = from; i < to; i++) {
        if (marks[i] !== 0) continue;
        sum += Math.min(power[i]!, BLOCK_CAP);
        count += 1;
      }
      if (count < BLOCK_LEAST) continue;
      const factor = factorOfCapped(sum / count, BLOCK_CAP);
      const error = BLOCK_ERROR / Math.sqrt(count);
      // Everything at the cap: no noise of a block, but something that fills it.
      if (!Number.isFinite(factor) || !(Math.abs(Math.log(factor)) > BLOCK_SIGNIFICANCE * error)) continue;
      const scale = 1 / factor;
      for (let i = from; i < to; i++) power[i]! *= scale;
    }
  }
}

/**
 * The factor f at which exponential powers of mean f, capped, have this mean: f (1 - exp(-cap/f)) = mean, by Newton.
 * Infinite where nearly all are at the cap, NaN where the mean is.
 */
export function factorOfCapped(mean: number, cap: number): number {
  if (!(mean > 0)) return mean === 0 ? 0 : Number.NaN;
  if (mean > 0.985 * cap) return Number.POSITIVE_INFINITY;
  let f = Math.max(mean, 0.2);
  for (let round = 0; round < 40; round++) {
    const tail = Math.exp(-cap / f);
    const value = f * (1 - tail) - mean;
    const slope = 1 - tail - (cap / f) * tail;
    const next = Math.max(f - value / slope, 0.1 * f);
    if (Math.abs(next - f) < 1e-6 * f) return next;
    f = next;
  }
  return f;
}
