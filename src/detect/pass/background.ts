/**
 * What a plane would hold without interference: in each integration one complex amplitude times the shape of the band,
 * and where needed sources away from the phase centre. Nothing is assumed of how the amplitude goes from one
 * integration to the next, so that wander, jumps, deep nulls, transits and gain steps are background, not outliers.
 */
import { medianInPlace } from "../statistics/order.ts";
import { Bandpass } from "./bandpass.ts";
import { DelayTerms, misfit } from "./delays.ts";
import { Plane } from "./plane.ts";

/** Integrations that share their slopes along the band: few show what drifts, many what is faint. */
const BLOCKS = [8, 32, 128];
/** Misfit of a block over that of noise, in units of its square root, from which one amplitude a row is not enough. */
const MISFIT = 1.5;
/** The same of a plane from which on the shape of its band is doubted. */
const BAD = 1.06;
/** A row whose mean power exceeds that of noise by this many standard errors is fitted again, robustly. */
const SUSPICIOUS = 3;
const ROBUST_ROUNDS = 4;
const ROUNDS_AGAIN = 2;
/** Share of a row's samples that agree on its amplitude when it is right. */
const MOST = 0.75;
const SHAPE_ROUNDS = 2;
/** Channels from which on the amplitude of a row may change along the band, */
const TILT_COLUMNS = 8;
/** where a source at the edge of sight could be as bright as all there is, and would then be off by this many sigmas. */
const LEAST_RUN = 0.15;
/** Power beyond which a sample does not count for the amplitude of its row. */
const INLIER = 5;

export class Background {
  readonly bandpass = new Bandpass();
  private readonly delays = new DelayTerms();
  private workReal = new Float64Array(0);
  private workImag = new Float64Array(0);
  private kept: Pick<Plane, "modelReal" | "modelImag" | "power"> = new Plane();
  /** normal equations of a row: the shape's square; V times its conjugate, real and imaginary; the same times the place in the band */
  private readonly sums = new Float64Array(7);
  /** (columns) -1..1 along the band */
  private along = new Float64Array(0);
  private tilted = false;
  /** (columns) noise of a sample over what is left of it */
  private leverage = new Float64Array(0);
  /** (rows) complex amplitudes that describe a row */
  private terms = new Uint8Array(0);
  private keptTerms = new Uint8Array(0);
  private norms = new Float64Array(0);
  private limits = new Float64Array(0);
  private counts = new Int32Array(0);

  /**
   * Fill the plane's model and `power`, |V - model|^2 made up for the noise that the model took.
   *
   * @param noise    2 sigma^2 of a sample, about
   * @param steepest (rows) radians a column that a source in sight can cause
   * @param swiftest radians an integration by which it can turn the phase
   */
  fit(plane: Plane, noise: number, steepest: (row: number) => number, swiftest: number): void {
    const { rows, columns } = plane;
    if (this.terms.length < rows) {
      this.terms = new Uint8Array(rows);
      this.keptTerms = new Uint8Array(rows);
    }
    if (this.workReal.length < columns) {
      this.workReal = new Float64Array(columns);
      this.workImag = new Float64Array(columns);
      this.along = new Float64Array(columns);
      this.leverage = new Float64Array(columns);
      this.norms = new Float64Array(columns);
      this.limits = new Float64Array(columns);
      this.counts = new Int32Array(columns);
    }
    this.fitShapes(plane, noise, steepest, swiftest);
    this.fillLeverage(columns);
    const { leverage, terms } = this;
    const base = this.tilted ? 2 : 1;
    for (let row = 0; row < rows; row++) {
      const sloped = terms[row]! > base;
      const even = columns / Math.max(1, columns - terms[row]!);
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        plane.power[i]! *= sloped ? even : leverage[c]!;
      }
    }
  }

  /** What is left of noise once a row's amplitude is taken out is less, most of all where the channel tells most of it. */
  private fillLeverage(columns: number): void {
    const { leverage, along, tilted } = this;
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
    const spread = s2 - s1 * middle;
    for (let c = 0; c < columns; c++) {
      const tilt = tilted && spread > 0 ? (along[c]! - middle) ** 2 / spread : 0;
      leverage[c] = 1 / Math.max(0.1, 1 - size[c]! * (1 / s0 + tilt));
    }
  }

  private fitShapes(plane: Plane, noise: number, steepest: (row: number) => number, swiftest: number): void {
    const { rows, columns } = plane;
    this.bandpass.fit(plane, noise, swiftest);
    for (let c = 0; c < columns; c++) this.along[c] = (2 * c - columns + 1) / columns;
    // How far the phase of a source at the edge of sight runs from the middle of the band, rms.
    const run = (0.5 * columns * steepest(0)) / Math.sqrt(3);
    this.tilted =
      columns >= TILT_COLUMNS &&
      this.bandpass.amplitude * Math.min(1, run) > LEAST_RUN * Math.sqrt(noise / 2);
    this.fitRows(plane, noise);
    for (let round = 0; this.bandpass.fitted && round < SHAPE_ROUNDS; round++) {
      this.refineBandpass(plane, noise);
      this.fitRows(plane, noise, true);
    }
    this.addDelays(plane, noise, steepest);
    const shaped = misfit(plane, 0, rows, noise);
    if (!this.bandpass.fitted || shaped.cost <= BAD * shaped.floor) return;
    // Several sources drifting against each other can pass for a shape of the band: try without one.
    this.keepShaped(plane);
    this.bandpass.flatten(columns);
    this.fitRows(plane, noise);
    this.addDelays(plane, noise, steepest);
    if (misfit(plane, 0, rows, noise).cost > shaped.cost) this.restoreShaped(plane);
  }

  /** @param again the rows have been fitted before with nearly this shape: few will need all the care */
  private fitRows(plane: Plane, noise: number, again = false): void {
    this.terms.fill(this.tilted ? 2 : 1, 0, plane.rows);
    for (let row = 0; row < plane.rows; row++) {
      const power = this.fitRow(plane, row);
      if (!isSuspicious(power, plane.usable[row]!, noise)) continue;
      if (again) {
        this.weighRow(plane, row, noise, ROUNDS_AGAIN);
        if (this.inliers(plane, row, noise) > MOST * plane.usable[row]!) continue;
      }
      this.fitRowRobustly(plane, row, noise);
    }
  }

  private inliers({ columns, marks, power }: Plane, row: number, noise: number): number {
    let count = 0;
    for (let i = row * columns; i < (row + 1) * columns; i++) {
      if (marks[i] === 0 && power[i]! < INLIER * noise) count += 1;
    }
    return count;
  }

  private addDelays(plane: Plane, noise: number, steepest: (row: number) => number): void {
    const { rows } = plane;
    for (const blockRows of BLOCKS) {
      if (blockRows > BLOCKS[0]! && blockRows >= 4 * rows) continue;
      for (let first = 0; first < rows; first += blockRows) {
        const last = Math.min(rows, first + blockRows);
        const { cost, floor } = misfit(plane, first, last, noise);
        if (cost <= floor + MISFIT * Math.sqrt(floor)) continue;
        const slope = Math.min(Math.PI, Math.max(steepest(first), steepest(last - 1)));
        const terms = this.delays.improve(plane, this.bandpass, first, last, noise, slope);
        if (terms > 0) this.terms.fill(terms, first, last);
      }
    }
  }

  private keepShaped({ rows, columns, modelReal, modelImag, power }: Plane): void {
    const size = rows * columns;
    if (this.kept.power.length < size) {
      this.kept = {
        modelReal: new Float32Array(size),
        modelImag: new Float32Array(size),
        power: new Float32Array(size),
      };
    }
    this.kept.modelReal.set(modelReal.subarray(0, size));
    this.kept.modelImag.set(modelImag.subarray(0, size));
    this.kept.power.set(power.subarray(0, size));
    this.keptTerms.set(this.terms.subarray(0, rows));
    this.bandpass.keep(columns);
  }

  private restoreShaped({ rows, columns, modelReal, modelImag, power }: Plane): void {
    const size = rows * columns;
    modelReal.set(this.kept.modelReal.subarray(0, size));
    modelImag.set(this.kept.modelImag.subarray(0, size));
    power.set(this.kept.power.subarray(0, size));
    this.terms.set(this.keptTerms.subarray(0, rows));
    this.bandpass.restore(columns);
  }

  /**
   * One amplitude, and where the plane is `tilted` its change along the band, to one row by least squares.
   * @returns the summed power of what is left
   */
  private fitRow(plane: Plane, row: number): number {
    const { columns, real, imag, marks } = plane;
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
      if (marks[at + c] !== 0) continue;
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
    return this.setRow(plane, row);
  }

  /** Set a row's model from the sums of its normal equations. @returns the summed power of what is left */
  private setRow(plane: Plane, row: number): number {
    const { columns, real, imag, modelReal, modelImag, marks, power } = plane;
    const { real: br, imag: bi } = this.bandpass;
    const { sums, along } = this;
    const s0 = sums[0]!;
    const r0 = sums[1]!;
    const i0 = sums[2]!;
    const s1 = sums[3]!;
    const s2 = sums[4]!;
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
      if (marks[i] === 0) sum += p;
    }
    return sum;
  }

  /** From the median amplitude of the channels to the one that most of them agree on (redescending weights). */
  private fitRowRobustly(plane: Plane, row: number, noise: number): void {
    const { columns, real, imag, marks } = plane;
    const { real: br, imag: bi, size } = this.bandpass;
    const { workReal, workImag, sums } = this;
    const at = row * columns;
    let count = 0;
    for (let c = 0; c < columns; c++) {
      // Where the passband lets little through, the ratio is noise.
      if (marks[at + c] !== 0 || size[c]! < 0.1) continue;
      workReal[count] = (br[c]! * real[at + c]! + bi[c]! * imag[at + c]!) / size[c]!;
      workImag[count] = (br[c]! * imag[at + c]! - bi[c]! * real[at + c]!) / size[c]!;
      count += 1;
    }
    if (count < 3) return;
    sums.fill(0);
    sums[0] = 1;
    sums[1] = medianInPlace(workReal, count);
    sums[2] = medianInPlace(workImag, count);
    this.setRow(plane, row);
    this.weighRow(plane, row, noise, ROBUST_ROUNDS);
  }

  /** Least squares by what the powers say: ever less weight for what sticks out, and in the end none. */
  private weighRow(plane: Plane, row: number, noise: number, rounds: number): void {
    const { columns, real, imag, marks, power } = plane;
    const { real: br, imag: bi, size } = this.bandpass;
    const { sums, along } = this;
    const at = row * columns;
    for (let round = 0; round <= rounds; round++) {
      sums.fill(0);
      for (let c = 0; c < columns; c++) {
        if (marks[at + c] !== 0) continue;
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
      this.setRow(plane, row);
    }
  }

  /** Power that a sample may have to count for the shape: none where most samples of the channel are off the model. */
  private fillLimits({ rows, columns, marks, power }: Plane, noise: number): void {
    const { limits, counts } = this;
    counts.fill(0);
    for (let row = 0; row < rows; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (marks[i] === 0) counts[c]! += power[i]! > INLIER * noise ? -1 : 1;
      }
    }
    for (let c = 0; c < columns; c++) limits[c] = counts[c]! > 0 ? INLIER * noise : Number.POSITIVE_INFINITY;
  }

  /** The shape by least squares from all rows, without what sticks out. */
  private refineBandpass(plane: Plane, noise: number): void {
    const { rows, columns, real, imag, modelReal, modelImag, marks, power } = plane;
    const { real: br, imag: bi, size } = this.bandpass;
    const { workReal, workImag, norms } = this;
    workReal.fill(0, 0, columns);
    workImag.fill(0, 0, columns);
    norms.fill(0, 0, columns);
    const limits = this.limits;
    this.fillLimits(plane, noise);
    for (let row = 0; row < rows; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (marks[i] !== 0 || power[i]! > limits[c]! || size[c]! === 0) continue;
        // The model over the shape is the row's amplitude m; V conj(m) sums to the shape times |m|^2.
        const mr = (modelReal[i]! * br[c]! + modelImag[i]! * bi[c]!) / size[c]!;
        const mi = (modelImag[i]! * br[c]! - modelReal[i]! * bi[c]!) / size[c]!;
        workReal[c]! += real[i]! * mr + imag[i]! * mi;
        workImag[c]! += imag[i]! * mr - real[i]! * mi;
        norms[c]! += mr * mr + mi * mi;
      }
    }
    for (let c = 0; c < columns; c++) {
      if (!(norms[c]! > 0)) continue;
      br[c] = workReal[c]! / norms[c]!;
      bi[c] = workImag[c]! / norms[c]!;
      size[c] = br[c]! * br[c]! + bi[c]! * bi[c]!;
    }
  }
}

/** Whether the powers left in a row are more than noise leaves. */
function isSuspicious(power: number, samples: number, noise: number): boolean {
  return samples > 2 && power > noise * (samples + SUSPICIOUS * Math.sqrt(samples));
}
