/** The amplitude of one row of a plane, by least squares and robustly. */
import { medianInPlace } from "../statistics/order.ts";
import type { Bandpass } from "./bandpass.ts";
import type { Plane } from "./plane.ts";

/** A row whose mean power exceeds that of noise by this many standard errors is fitted again, robustly. */
const SUSPICIOUS = 3;
/** Rounds of weighting, and where the row was nearly right. */
const ROBUST_ROUNDS = 4;
const ROUNDS_AGAIN = 2;
/** Share of a row's samples that agree on its amplitude when it is right. */
const MOST = 0.75;
/** Power beyond which a sample does not count for the amplitude of its row. */
export const INLIER = 5;

export class RowFit {
  /** whether the amplitude of a row may change along the band, */
  tilted = false;
  /** and how stiff it is: noise over the squared change that is likely, per step of `along` */
  stiffness = 0;
  private readonly bandpass: Bandpass;
  /** normal equations of a row: the shape's square; V times its conjugate, real and imaginary; the same times the place in the band */
  private readonly sums = new Float64Array(7);
  /** (columns) -1..1 along the band */
  private along = new Float64Array(0);
  private leverages = new Float64Array(0);
  private workReal = new Float64Array(0);
  private workImag = new Float64Array(0);

  constructor(bandpass: Bandpass) {
    this.bandpass = bandpass;
  }

  resize(columns: number): void {
    if (this.workReal.length < columns) {
      this.workReal = new Float64Array(columns);
      this.workImag = new Float64Array(columns);
      this.along = new Float64Array(columns);
      this.leverages = new Float64Array(columns);
    }
    for (let c = 0; c < columns; c++) this.along[c] = (2 * c - columns + 1) / columns;
  }

  /** @param again the row has been fitted before with nearly this shape: it will hardly need all the care */
  fit(plane: Plane, row: number, noise: number, again: boolean): void {
    const power = this.fitEvenly(plane, row);
    if (!isSuspicious(power, plane.usable[row]!, noise)) return;
    if (again) {
      this.weigh(plane, row, noise, ROUNDS_AGAIN);
      if (this.inliers(plane, row, noise) > MOST * plane.usable[row]!) return;
    }
    this.fitRobustly(plane, row, noise);
  }

  /**
   * (columns) noise of a sample over what is left of it once the row's amplitude is taken out: most where the channel tells
   * most of it.
   */
  leverage(columns: number): Float64Array {
    const { leverages, along, tilted } = this;
    const { size } = this.bandpass;
    let s0 = 0;
    let s1 = 0;
    let s2 = 0;
    for (let c = 0; c < columns; c++) {
      s0 += size[c]!;
      s1 += size[c]! * along[c]!;
      s2 += size[c]! * along[c]! ** 2;
    }
    const middle = s1 / s0;
    const spread = s2 + this.stiffness - s1 * middle;
    for (let c = 0; c < columns; c++) {
      const tilt = tilted && spread > 0 ? (along[c]! - middle) ** 2 / spread : 0;
      leverages[c] = 1 / Math.max(0.1, 1 - size[c]! * (1 / s0 + tilt));
    }
    return leverages;
  }

  private inliers({ columns, held, power }: Plane, row: number, noise: number): number {
    let count = 0;
    for (let i = row * columns; i < (row + 1) * columns; i++) {
      if (held[i] === 0 && power[i]! < INLIER * noise) count += 1;
    }
    return count;
  }

  /**
   * One amplitude, and where the plane is `tilted` its change along the band, by least squares.
   * @returns the summed power of what is left
   */
  private fitEvenly(plane: Plane, row: number): number {
    const { columns, real, imag, held } = plane;
    const { real: br, imag: bi, size } = this.bandpass;
    const { sums, along } = this;
    const at = row * columns;
    let s0 = 0;
    let r0 = 0;
    let i0 = 0;
    let s1 = 0;
    let s2 = 0;
    let r1 = 0;
    let i1 = 0;
    for (let c = 0; c < columns; c++) {
      if (held[at + c] !== 0) continue;
      const x = real[at + c]!;
      const y = imag[at + c]!;
      const weight = size[c]!;
      const step = along[c]!;
      const re = br[c]! * x + bi[c]! * y;
      const im = br[c]! * y - bi[c]! * x;
      s0 += weight;
      r0 += re;
      i0 += im;
      s1 += weight * step;
      s2 += weight * step * step;
      r1 += re * step;
      i1 += im * step;
    }
    sums[0] = s0;
    sums[1] = r0;
    sums[2] = i0;
    sums[3] = s1;
    sums[4] = s2;
    sums[5] = r1;
    sums[6] = i1;
    return this.set(plane, row);
  }

  /** Set a row's model from the sums of its normal equations. @returns the summed power of what is left */
  private set(plane: Plane, row: number): number {
    const { columns, real, imag, modelReal, modelImag, held, power } = plane;
    const { real: br, imag: bi } = this.bandpass;
    const { sums, along } = this;
    const s0 = sums[0]!;
    const r0 = sums[1]!;
    const i0 = sums[2]!;
    const s1 = sums[3]!;
    const s2 = sums[4]! + this.stiffness;
    const r1 = sums[5]!;
    const i1 = sums[6]!;
    const determinant = s0 * s2 - s1 * s1;
    const two = this.tilted && determinant > 1e-6 * s0 * s0;
    const scale = two ? 1 / determinant : s0 > 0 ? 1 / s0 : 0;
    const re = two ? (s2 * r0 - s1 * r1) * scale : r0 * scale;
    const im = two ? (s2 * i0 - s1 * i1) * scale : i0 * scale;
    const tiltRe = two ? (s0 * r1 - s1 * r0) * scale : 0;
    const tiltIm = two ? (s0 * i1 - s1 * i0) * scale : 0;
    let sum = 0;
    for (let c = 0, i = row * columns; c < columns; c++, i++) {
      const ar = re + tiltRe * along[c]!;
      const ai = im + tiltIm * along[c]!;
      const mr = br[c]! * ar - bi[c]! * ai;
      const mi = br[c]! * ai + bi[c]! * ar;
      modelReal[i] = mr;
      modelImag[i] = mi;
      const x = real[i]! - mr;
      const y = imag[i]! - mi;
      const p = x * x + y * y;
      power[i] = p;
      if (held[i] === 0) sum += p;
    }
    return sum;
  }

  /** From the median amplitude of the channels to the one that most of them agree on (redescending weights). */
  private fitRobustly(plane: Plane, row: number, noise: number): void {
    const { columns, real, imag, held } = plane;
    const { real: br, imag: bi, size } = this.bandpass;
    const { workReal, workImag, sums } = this;
    const at = row * columns;
    let count = 0;
    for (let c = 0; c < columns; c++) {
      // Where the passband lets little through, the ratio is noise.
      if (held[at + c] !== 0 || size[c]! < 0.1) continue;
      workReal[count] = (br[c]! * real[at + c]! + bi[c]! * imag[at + c]!) / size[c]!;
      workImag[count] = (br[c]! * imag[at + c]! - bi[c]! * real[at + c]!) / size[c]!;
      count += 1;
    }
    if (count < 3) return;
    sums.fill(0);
    sums[0] = 1;
    sums[1] = medianInPlace(workReal, count);
    sums[2] = medianInPlace(workImag, count);
    this.set(plane, row);
    this.weigh(plane, row, noise, ROBUST_ROUNDS);
  }

  /** Least squares by what the powers say: ever less weight for what sticks out, and in the end none. */
  private weigh(plane: Plane, row: number, noise: number, rounds: number): void {
    const { columns, real, imag, held, power } = plane;
    const { real: br, imag: bi, size } = this.bandpass;
    const { sums, along } = this;
    const at = row * columns;
    for (let round = 0; round <= rounds; round++) {
      sums.fill(0);
      for (let c = 0; c < columns; c++) {
        if (held[at + c] !== 0) continue;
        const p = power[at + c]! / noise;
        const weight = round === rounds ? (p < INLIER ? 1 : 0) : 1 / (1 + 0.5 * p);
        const re = weight * (br[c]! * real[at + c]! + bi[c]! * imag[at + c]!);
        const im = weight * (br[c]! * imag[at + c]! - bi[c]! * real[at + c]!);
        const step = along[c]!;
        sums[0]! += weight * size[c]!;
        sums[1]! += re;
        sums[2]! += im;
        sums[3]! += weight * size[c]! * step;
        sums[4]! += weight * size[c]! * step * step;
        sums[5]! += re * step;
        sums[6]! += im * step;
      }
      if (!(sums[0]! > 0)) return;
      this.set(plane, row);
    }
  }
}

/** Whether the powers left in a row are more than noise leaves. */
function isSuspicious(power: number, samples: number, noise: number): boolean {
  return samples > 2 && power > noise * (samples + SUSPICIOUS * Math.sqrt(samples));
}
