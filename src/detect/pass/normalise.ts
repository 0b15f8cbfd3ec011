/**
 * Residual powers over their noise. The noise is the plane's own: by channel, robustly over time; and by block of
 * integrations, robustly over everything in it; so that what is elevated now and then, or in a few channels, stands out,
 * while an antenna that is noisy for a while or a passband that lets less noise through does not.
 */
import { mad } from "../../util/statistics.ts";
import { CappedMean } from "../statistics/capped-mean.ts";
import { medianInPlace, selectKth } from "../statistics/order.ts";
import type { Bandpass } from "./bandpass.ts";
import type { Plane } from "./plane.ts";

/** Rows from which each channel has a noise of its own. */
const FEWEST_ROWS = 8;
/** Samples that the first guess of the noise rests on. */
const GUESS_SAMPLES = 512;
/** Channels this far apart have about the same noise. */
const SMOOTH_REACH = 3;
/** Noise of a channel above this many times that of the quieter part of the band is not noise. */
const MOST_NOISE = 2;
const QUIET_QUANTILE = 0.4;
/** Integrations that share a noise. */
const BLOCKS = [32, 8];
const BLOCK_LEAST = 64;
/** Standard errors that a block's noise must differ by to count. */
const BLOCK_SIGNIFICANCE = 3;

/** Squared share of the source's amplitude that the background may be wrong by: 2 %. Common practice, no source. */
const IMPERFECTION = 0.02 ** 2;
/** Below this share of the noise it is not worth looking at. */
const LEAST_IMPERFECTION = 0.01;
/** The band's shape is not taken to be smaller than this. */
const LEAST_SHAPE = 1e-4;

/** Low caps are robust, high ones precise. */
const LEVEL = new CappedMean(1);
const ROW = new CappedMean(3);

export class Normaliser {
  /** (columns) 2 sigma^2 of the plane; NaN where unknown */
  noise = new Float64Array(0);
  /** (rows) noise power over the plane's, robust; NaN without samples */
  rowNoise = new Float32Array(0);
  /** (rows) sum of the capped powers, and how many */
  private rowSum = new Float64Array(0);
  private rowCount = new Int32Array(0);
  private work = new Float64Array(0);
  private raw = new Float64Array(0);
  private counts = new Int32Array(0);
  private inverse = new Float64Array(0);

  /**
   * Divide the plane's powers by their noise.
   *
   * @param bandpass whose shape noise before the passband shares
   * @returns 2 sigma^2 typical of the plane, NaN when nothing is usable
   */
  apply(plane: Plane, bandpass: Bandpass): number {
    const { rows, columns } = plane;
    this.resize(rows, columns);
    const guess = this.guessNoise(plane);
    if (rows >= FEWEST_ROWS) this.noiseByColumn(plane, guess, bandpass);
    else this.noise.fill(guess, 0, columns);
    this.divide(plane);
    for (const blockRows of BLOCKS) this.levelBlocks(plane, blockRows);
    const { noise } = this;
    let total = 0;
    let known = 0;
    for (let c = 0; c < columns; c++) {
      if (!(noise[c]! > 0)) continue;
      total += noise[c]!;
      known += 1;
    }
    const typical = total / known;
    if (IMPERFECTION * bandpass.amplitude ** 2 > LEAST_IMPERFECTION * typical) this.allowImperfection(plane);
    return typical;
  }

  private resize(rows: number, columns: number): void {
    if (this.noise.length < columns) {
      this.noise = new Float64Array(columns);
      this.raw = new Float64Array(columns);
      this.counts = new Int32Array(columns);
      this.inverse = new Float64Array(columns);
      this.work = new Float64Array(Math.max(columns, GUESS_SAMPLES + 1));
    }
    if (this.rowNoise.length < rows) {
      this.rowNoise = new Float32Array(rows);
      this.rowSum = new Float64Array(rows);
      this.rowCount = new Int32Array(rows);
    }
  }

  /** By the median of samples spread over the plane; NaN where nothing is left of them. */
  private guessNoise({ rows, columns, power, marks }: Plane): number {
    const { work } = this;
    const size = rows * columns;
    // An odd step visits every channel in turn.
    const step = Math.max(1, Math.floor(size / GUESS_SAMPLES)) | 1;
    let count = 0;
    for (let i = 0; i < size && count < work.length; i += step) {
      if (marks[i] === 0) work[count++] = power[i]!;
    }
    const noise = medianInPlace(work, count) / Math.LN2;
    return noise > 0 ? noise : Number.NaN;
  }

  private noiseByColumn({ rows, columns, power, marks }: Plane, guess: number, bandpass: Bandpass): void {
    const { work, raw, noise, counts } = this;
    raw.fill(0, 0, columns);
    counts.fill(0, 0, columns);
    for (let row = 0; row < rows; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (marks[i] !== 0) continue;
        const p = power[i]!;
        raw[c]! += Math.min(p, guess);
        counts[c]! += 1;
      }
    }
    for (let c = 0; c < columns; c++) {
      const known = counts[c]! >= FEWEST_ROWS / 2;
      raw[c] = known ? guess * LEVEL.factor(raw[c]! / (guess * counts[c]!)) : Number.NaN;
    }
    const shape = bandpass.size;
    const follows = bandpass.fitted && this.followsShape(columns, shape);
    if (follows) for (let c = 0; c < columns; c++) raw[c]! /= Math.max(shape[c]!, LEAST_SHAPE);
    const quiet = this.quietNoise(columns);
    for (let c = 0; c < columns; c++) {
      let count = 0;
      for (let k = Math.max(0, c - SMOOTH_REACH); k <= Math.min(columns - 1, c + SMOOTH_REACH); k++) {
        if (raw[k]! > 0) work[count++] = raw[k]!;
      }
      const level = count === 0 ? Number.NaN : Math.min(medianInPlace(work, count), MOST_NOISE * quiet);
      noise[c] = follows ? level * Math.max(shape[c]!, LEAST_SHAPE) : level;
    }
  }

  /** Whether the noise goes along the band as the shape does, rather than being the same everywhere. */
  private followsShape(columns: number, shape: Float64Array): boolean {
    const flat = this.raw.slice(0, columns).map(Math.log);
    const shaped = flat.map((value, c) => value - Math.log(Math.max(shape[c]!, LEAST_SHAPE)));
    return mad(shaped) < mad(flat);
  }

  private quietNoise(columns: number): number {
    let count = 0;
    for (let c = 0; c < columns; c++) if (this.raw[c]! > 0) this.work[count++] = this.raw[c]!;
    return selectKth(this.work, count, Math.floor(count * QUIET_QUANTILE));
  }

  /** Powers over noise, and what the rows add up to. Where no noise is known a sample is as good as missing. */
  private divide({ rows, columns, power, marks }: Plane): void {
    const { noise, inverse, rowNoise, rowSum, rowCount } = this;
    for (let c = 0; c < columns; c++) inverse[c] = 1 / noise[c]!;
    for (let row = 0; row < rows; row++) {
      let high = 0;
      let low = 0;
      let count = 0;
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        const p = power[i]! * inverse[c]!;
        if (marks[i] !== 0 || !(p >= 0)) {
          power[i] = 0;
          marks[i] = 2;
          continue;
        }
        power[i] = p;
        high += Math.min(p, ROW.cap);
        low += Math.min(p, LEVEL.cap);
        count += 1;
      }
      rowSum[row] = low;
      rowCount[row] = count;
      rowNoise[row] = ROW.factor(high / count);
    }
  }

  /** Take out the noise that blocks of integrations have more or less than the plane. */
  private levelBlocks(plane: Plane, blockRows: number): void {
    const { rows } = plane;
    const { rowSum, rowCount } = this;
    for (let first = 0; first < rows; first += blockRows) {
      const last = Math.min(rows, first + blockRows);
      let sum = 0;
      let count = 0;
      for (let row = first; row < last; row++) {
        sum += rowSum[row]!;
        count += rowCount[row]!;
      }
      if (count < BLOCK_LEAST) continue;
      const factor = LEVEL.factor(sum / count);
      const error = LEVEL.error / Math.sqrt(count);
      // Everything at the cap: no noise of a block, but something that fills it.
      if (!Number.isFinite(factor) || !(Math.abs(Math.log(factor)) > BLOCK_SIGNIFICANCE * error)) continue;
      for (let row = first; row < last; row++) this.scaleRow(plane, row, 1 / factor);
    }
  }

  private scaleRow({ columns, power, marks }: Plane, row: number, scale: number): void {
    let low = 0;
    for (let i = row * columns; i < (row + 1) * columns; i++) {
      const p = power[i]! * scale;
      power[i] = p;
      if (marks[i] === 0) low += Math.min(p, LEVEL.cap);
    }
    this.rowSum[row] = low;
  }

  /**
   * What a small error of the background explains is not outlying; it keeps its place above the median. The error is a share
   * of what the sources have in the block, since where they cancel their errors do not.
   */
  private allowImperfection({ rows, columns, power, modelReal, modelImag }: Plane): void {
    const { inverse } = this;
    const blockRows = BLOCKS.at(-1)!;
    for (let first = 0; first < rows; first += blockRows) {
      const from = first * columns;
      const to = Math.min(rows, first + blockRows) * columns;
      let size = 0;
      for (let i = from; i < to; i++) size += modelReal[i]! * modelReal[i]! + modelImag[i]! * modelImag[i]!;
      const error = (IMPERFECTION * size) / (to - from);
      for (let start = from; start < to; start += columns) {
        for (let c = 0; c < columns; c++) {
          const p = power[start + c]!;
          if (p > Math.LN2) power[start + c] = Math.max(Math.LN2, p / (1 + error * inverse[c]!));
        }
      }
    }
  }
}
