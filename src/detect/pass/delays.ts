/**
 * Sources away from the phase centre: their phase runs along the band, by no more than a source within sight of the
 * dishes can make it. Where a block of integrations is badly described by one amplitude a row, up to three such slopes are
 * added, each only when it explains what the block shows.
 */
import type { Bandpass } from "./bandpass.ts";
import type { Plane } from "./plane.ts";
import { leastPower, misfit, tiltOf, wavePower } from "./waves.ts";

const MOST_SLOPES = 3;
const TERMS = MOST_SLOPES + 1;
/** Steps of the search in units of a turn over the band. */
const STEPS_PER_TURN = 4;
const MOST_STEPS = 64;
/** All slopes together must explain this share of what the block has in excess of noise, */
const LEAST_EXPLAINED = 0.6;
/** the first of them this one, */
const LEAST_FIRST = 0.2;
/** besides what one more amplitude a row, and a slope, explain of pure noise. */
const TERM_COST = 0.5;
const SLOPE_COST = 3;
const POLISH_ROUNDS = 3;
const FIT_ROUNDS = 2;
/** Over noise: then nothing more is sought. */
const ENOUGH = 1.05;

export class DelayTerms {
  private slopes: readonly number[] = [];
  /** by first row of a block of the plane at hand */
  private readonly bySlopes = new Map<number, readonly number[]>();
  /** (terms x columns) */
  private basisReal = new Float64Array(0);
  private basisImag = new Float64Array(0);
  private readonly matrixReal = new Float64Array(TERMS * TERMS);
  private readonly matrixImag = new Float64Array(TERMS * TERMS);
  private readonly rightReal = new Float64Array(TERMS);
  private readonly rightImag = new Float64Array(TERMS);
  /** (rows x terms) */
  private amplitudeReal = new Float64Array(0);
  private amplitudeImag = new Float64Array(0);
  private savedReal = new Float32Array(0);
  private savedImag = new Float32Array(0);
  private savedPower = new Float32Array(0);

  /**
   * Improve the model of rows [first, last) where slopes do; leave it alone where they do not explain most of what the
   * block has in excess of noise, since then it is not the sky's.
   *
   * @param noise 2 sigma^2
   * @param steepest radians a column that a source in sight can cause
   * @returns the slopes that describe the block now; none when it was left alone
   */
  improve(
    plane: Plane,
    bandpass: Bandpass,
    first: number,
    last: number,
    noise: number,
    steepest: number,
  ): readonly number[] {
    const before = misfit(plane, first, last, noise);
    const rows = last - first;
    const tilt = tiltOf(plane, bandpass, first, last);
    this.slopes = [];
    const known = this.steepestPower(plane, bandpass, first, last, noise, steepest);
    if (known === null && wavePower(plane, bandpass, first, last, noise, tilt) < leastPower(rows)) return [];
    const refit = (slopes: readonly number[]) => this.refit(plane, bandpass, first, last, noise, slopes);
    this.begin(plane, first, last);
    const excess = before.cost - before.floor;
    const search = (base: number): number => {
      let cost = refit([base]);
      while (this.slopes.length < TERMS && cost > ENOUGH * before.floor) {
        const slope = this.steepestPower(plane, bandpass, first, last, noise, steepest);
        if (slope === null) break;
        cost = refit([...this.slopes, slope]);
        // The first source away from the centre tells most of what is there, if it is sources.
        if (before.cost - cost < LEAST_FIRST * excess) break;
        for (let round = 0; round < POLISH_ROUNDS && cost > ENOUGH * before.floor; round++) {
          const slopes = this.slopes;
          const better = refit(this.polished(plane, first, last));
          if (better >= cost) {
            cost = refit(slopes);
            break;
          }
          cost = better;
        }
      }
      return cost;
    };
    let cost = search(0);
    if (cost > ENOUGH * before.floor) {
      // An antenna's delay may have changed: then the whole band is tilted, by anything.
      const upright = this.slopes;
      const tilted = search(tilt);
      cost = tilted < cost ? tilted : refit(upright);
    }
    const spent = TERM_COST * rows * (this.slopes.length - 1) + SLOPE_COST * this.slopes.length;
    if (before.cost - cost < LEAST_EXPLAINED * excess + spent) {
      this.restore(plane, first, last);
      return [];
    }
    this.bySlopes.set(first, this.slopes);
    return this.slopes;
  }

  /**
   * Try the slopes of a neighbouring block, which need explain no more than the amplitudes that they add would of noise.
   * @returns the slopes that describe the block now; none when it was left alone
   */
  adopt(
    plane: Plane,
    bandpass: Bandpass,
    first: number,
    last: number,
    noise: number,
    slopes: readonly number[],
  ): readonly number[] {
    const before = misfit(plane, first, last, noise);
    this.begin(plane, first, last);
    const refit = (tried: readonly number[]) => this.refit(plane, bandpass, first, last, noise, tried);
    let cost = refit(slopes);
    const better = refit(this.polished(plane, first, last));
    if (better < cost) cost = better;
    else cost = refit(slopes);
    if (before.cost - cost < TERM_COST * (last - first) * Math.max(1, slopes.length - 1)) {
      this.restore(plane, first, last);
      return [];
    }
    this.bySlopes.set(first, this.slopes);
    return this.slopes;
  }

  /** Forget the blocks of the plane before. */
  reset(): void {
    this.bySlopes.clear();
  }

  /** Slopes found for the block that begins at a row of the plane at hand. */
  slopesOf(first: number): readonly number[] {
    return this.bySlopes.get(first) ?? [];
  }

  private begin(plane: Plane, first: number, last: number): void {
    this.save(plane, first, last);
    const size = (last - first) * TERMS;
    if (this.amplitudeReal.length >= size) return;
    this.amplitudeReal = new Float64Array(size);
    this.amplitudeImag = new Float64Array(size);
  }

  /** Fit the block with these slopes. @returns its misfit */
  private refit(
    plane: Plane,
    bandpass: Bandpass,
    first: number,
    last: number,
    noise: number,
    slopes: readonly number[],
  ): number {
    this.slopes = slopes;
    this.fillBasis(bandpass, plane.columns);
    for (let row = first; row < last; row++) this.fitRow(plane, row, (row - first) * TERMS, noise);
    return misfit(plane, first, last, noise).cost;
  }

  /** The slope whose waves hold most of the residual's power, or null when it is what noise holds. */
  private steepestPower(
    plane: Plane,
    bandpass: Bandpass,
    first: number,
    last: number,
    noise: number,
    steepest: number,
  ): number | null {
    const coarse = (2 * Math.PI) / (plane.columns * STEPS_PER_TURN);
    const half = Math.max(1, Math.min(MOST_STEPS / 2, Math.ceil(steepest / coarse)));
    const power = (slope: number) => wavePower(plane, bandpass, first, last, noise, slope);
    let best = 0;
    let found = 0;
    for (let k = -half; k <= half; k++) {
      const slope = (k * steepest) / half;
      if (this.slopes.some((known) => Math.abs(known - slope) < 0.25 * coarse)) continue;
      const value = power(slope);
      if (value <= best) continue;
      best = value;
      found = slope;
    }
    if (best < leastPower(last - first)) return null;
    for (let step = steepest / half / 2; step > coarse / 16; step /= 2) {
      for (const slope of [found - step, found + step]) {
        const value = power(slope);
        if (value <= best) continue;
        best = value;
        found = slope;
      }
    }
    return found;
  }

  /** The slopes moved to where the residual says they should be: one step of Gauss and Newton, each by itself. */
  private polished(plane: Plane, first: number, last: number): number[] {
    const { columns, real, imag, modelReal, modelImag, held } = plane;
    const terms = this.slopes.length;
    const middle = (columns - 1) / 2;
    const along = new Float64Array(terms);
    const norm = new Float64Array(terms);
    for (let row = first; row < last; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (held[i] !== 0) continue;
        const x = real[i]! - modelReal[i]!;
        const y = imag[i]! - modelImag[i]!;
        for (let j = 0; j < terms; j++) {
          const ar = this.amplitudeReal[(row - first) * TERMS + j]!;
          const ai = this.amplitudeImag[(row - first) * TERMS + j]!;
          const br = this.basisReal[j * columns + c]!;
          const bi = this.basisImag[j * columns + c]!;
          // A step of slope turns the term by i (c - middle).
          const tr = -(br * ai + bi * ar) * (c - middle);
          const ti = (br * ar - bi * ai) * (c - middle);
          along[j]! += tr * x + ti * y;
          norm[j]! += tr * tr + ti * ti;
        }
      }
    }
    const most = Math.PI / (columns * STEPS_PER_TURN);
    return this.slopes.map((slope, j) => {
      const step = norm[j]! > 0 ? along[j]! / norm[j]! : 0;
      return slope + Math.max(-most, Math.min(most, step));
    });
  }

  private fillBasis({ real, imag }: Bandpass, columns: number): void {
    if (this.basisReal.length < TERMS * columns) {
      this.basisReal = new Float64Array(TERMS * columns);
      this.basisImag = new Float64Array(TERMS * columns);
    }
    for (const [term, slope] of this.slopes.entries()) {
      for (let c = 0; c < columns; c++) {
        const wr = Math.cos(slope * c);
        const wi = Math.sin(slope * c);
        this.basisReal[term * columns + c] = real[c]! * wr - imag[c]! * wi;
        this.basisImag[term * columns + c] = real[c]! * wi + imag[c]! * wr;
      }
    }
  }

  /** All terms to one row, by least squares: plain, then with what sticks out counting less. */
  private fitRow(plane: Plane, row: number, keptAt: number, noise: number): void {
    const { columns, real, imag, modelReal, modelImag, held, power } = plane;
    const { basisReal, basisImag, matrixReal, matrixImag, rightReal, rightImag } = this;
    const terms = this.slopes.length;
    const at = row * columns;
    for (let round = 0; round < FIT_ROUNDS; round++) {
      matrixReal.fill(0);
      matrixImag.fill(0);
      rightReal.fill(0);
      rightImag.fill(0);
      for (let c = 0; c < columns; c++) {
        if (held[at + c] !== 0) continue;
        const weight = round === 0 ? 1 : 1 / (1 + power[at + c]! / (2 * noise));
        for (let j = 0; j < terms; j++) {
          const jr = basisReal[j * columns + c]! * weight;
          const ji = basisImag[j * columns + c]! * weight;
          rightReal[j]! += jr * real[at + c]! + ji * imag[at + c]!;
          rightImag[j]! += jr * imag[at + c]! - ji * real[at + c]!;
          for (let k = 0; k <= j; k++) {
            const kr = basisReal[k * columns + c]!;
            const ki = basisImag[k * columns + c]!;
            matrixReal[j * TERMS + k]! += jr * kr + ji * ki;
            matrixImag[j * TERMS + k]! += jr * ki - ji * kr;
          }
        }
      }
      if (!this.solve(terms)) return;
      for (let c = 0; c < columns; c++) {
        let mr = 0;
        let mi = 0;
        for (let j = 0; j < terms; j++) {
          const br = basisReal[j * columns + c]!;
          const bi = basisImag[j * columns + c]!;
          mr += br * rightReal[j]! - bi * rightImag[j]!;
          mi += br * rightImag[j]! + bi * rightReal[j]!;
        }
        modelReal[at + c] = mr;
        modelImag[at + c] = mi;
        const x = real[at + c]! - mr;
        const y = imag[at + c]! - mi;
        power[at + c] = x * x + y * y;
      }
    }
    for (let j = 0; j < terms; j++) {
      this.amplitudeReal[keptAt + j] = rightReal[j]!;
      this.amplitudeImag[keptAt + j] = rightImag[j]!;
    }
  }

  /** Cholesky solution of the normal equations into `right`, in place. @returns false when there are too few samples */
  private solve(terms: number): boolean {
    const { matrixReal: a, matrixImag: b, rightReal: x, rightImag: y } = this;
    for (let j = 0; j < terms; j++) {
      for (let k = 0; k <= j; k++) {
        let re = a[j * TERMS + k]!;
        let im = b[j * TERMS + k]!;
        for (let m = 0; m < k; m++) {
          re -= a[j * TERMS + m]! * a[k * TERMS + m]! + b[j * TERMS + m]! * b[k * TERMS + m]!;
          im -= b[j * TERMS + m]! * a[k * TERMS + m]! - a[j * TERMS + m]! * b[k * TERMS + m]!;
        }
        if (j === k) {
          // Slopes close together are nearly the same: a touch of ridge keeps the amplitudes finite.
          const pivot = re + 1e-9 * a[0]!;
          if (!(pivot > 0)) return false;
          a[j * TERMS + j] = Math.sqrt(pivot);
          b[j * TERMS + j] = 0;
        } else {
          a[j * TERMS + k] = re / a[k * TERMS + k]!;
          b[j * TERMS + k] = im / a[k * TERMS + k]!;
        }
      }
    }
    for (let j = 0; j < terms; j++) {
      for (let m = 0; m < j; m++) {
        x[j]! -= a[j * TERMS + m]! * x[m]! - b[j * TERMS + m]! * y[m]!;
        y[j]! -= a[j * TERMS + m]! * y[m]! + b[j * TERMS + m]! * x[m]!;
      }
      x[j]! /= a[j * TERMS + j]!;
      y[j]! /= a[j * TERMS + j]!;
    }
    for (let j = terms - 1; j >= 0; j--) {
      for (let m = j + 1; m < terms; m++) {
        x[j]! -= a[m * TERMS + j]! * x[m]! + b[m * TERMS + j]! * y[m]!;
        y[j]! -= a[m * TERMS + j]! * y[m]! - b[m * TERMS + j]! * x[m]!;
      }
      x[j]! /= a[j * TERMS + j]!;
      y[j]! /= a[j * TERMS + j]!;
    }
    return true;
  }

  private save(plane: Plane, first: number, last: number): void {
    const [from, to] = [first * plane.columns, last * plane.columns];
    if (this.savedReal.length < to - from) {
      this.savedReal = new Float32Array(to - from);
      this.savedImag = new Float32Array(to - from);
      this.savedPower = new Float32Array(to - from);
    }
    this.savedReal.set(plane.modelReal.subarray(from, to));
    this.savedImag.set(plane.modelImag.subarray(from, to));
    this.savedPower.set(plane.power.subarray(from, to));
  }

  private restore(plane: Plane, first: number, last: number): void {
    const [from, to] = [first * plane.columns, last * plane.columns];
    plane.modelReal.set(this.savedReal.subarray(0, to - from), from);
    plane.modelImag.set(this.savedImag.subarray(0, to - from), from);
    plane.power.set(this.savedPower.subarray(0, to - from), from);
  }
}
