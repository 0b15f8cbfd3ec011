/**
 * The shape that a baseline's visibilities have along frequency at all times alike, passband and source spectrum
 * together: the first singular vector of the plane, where it stands out of the noise and spreads over the band.
 */
import { selectKth } from "../statistics/order.ts";
import type { Plane } from "./plane.ts";

/** Rows that are looked at, spread evenly: enough for the shape, cheap for long planes. */
const MOST_ROWS = 32;
/** Fewer rows cannot tell the shape of the band from what is in it at the moment. */
const FEWEST_ROWS = 8;
const ROUNDS = 4;
/** Amplitudes that the clip rests on. */
const CLIP_SAMPLES = 256;
/** Amplitudes are clipped at this many times their median, lest interference be the shape. */
const CLIP = 3;
/**
 * A shape in fewer channels than this share of the band (participation ratio) is something in the band: a line of the
 * sky if its phase keeps still, interference if not.
 */
const LEAST_SPREAD = 0.5;
const LEAST_COHERENCE = 0.8;
/** Radians an integration that wander and noise may add. */
const STILL = 0.1;
/** Times the power that the best shape of pure noise takes more than a flat one. */
const SAFETY = 1.5;

export class Bandpass {
  /** (columns) of mean square 1; meaningless where not `fitted` */
  real = new Float64Array(0);
  imag = new Float64Array(0);
  /** (columns) its squared size */
  size = new Float64Array(0);
  fitted = false;
  /** rms of what the shape describes, without noise, unit of the dataset; 0 where there is nothing */
  amplitude = 0;
  private keptReal = new Float64Array(0);
  private keptImag = new Float64Array(0);
  private sampleReal = new Float64Array(0);
  private sampleImag = new Float64Array(0);
  private amplitudes = new Float64Array(0);

  /**
   * @param noise    2 sigma^2 of a sample, about
   * @param swiftest radians an integration by which a source in sight can turn the phase
   */
  fit(plane: Plane, noise: number, swiftest: number): void {
    const { columns } = plane;
    this.resize(columns);
    this.flatten(columns);
    const rows = this.takeSample(plane);
    const flat = this.flatPower(rows, columns);
    this.amplitude = sourceAmplitude(flat, rows, columns, noise);
    if (rows < FEWEST_ROWS || !(noise > 0)) return;
    this.startWithSlope(rows, columns);
    let power = 0;
    for (let round = 0; round < ROUNDS; round++) power = this.iterate(rows, columns);
    // Largest singular value of noise: sqrt(rows) + sqrt(columns) (Marchenko & Pastur 1967), against sqrt(rows).
    const byNoise = noise * (columns + 2 * Math.sqrt(rows * columns));
    const spread = this.spread(columns) >= LEAST_SPREAD || this.isSky(plane, swiftest);
    if (power - flat > SAFETY * byNoise && spread) {
      this.fitted = true;
      this.amplitude = sourceAmplitude(power, rows, columns, noise);
    } else this.flatten(columns);
  }

  /** The same everywhere. */
  flatten(columns: number): void {
    this.real.fill(1, 0, columns);
    this.imag.fill(0, 0, columns);
    this.size.fill(1, 0, columns);
    this.fitted = false;
  }

  /** Put the shape aside, to `restore` it. */
  keep(columns: number): void {
    this.keptReal.set(this.real.subarray(0, columns));
    this.keptImag.set(this.imag.subarray(0, columns));
  }

  restore(columns: number): void {
    this.real.set(this.keptReal.subarray(0, columns));
    this.imag.set(this.keptImag.subarray(0, columns));
    for (let c = 0; c < columns; c++) this.size[c] = this.real[c]! ** 2 + this.imag[c]! ** 2;
    this.fitted = true;
  }

  private resize(columns: number): void {
    if (this.real.length >= columns) return;
    this.real = new Float64Array(columns);
    this.imag = new Float64Array(columns);
    this.size = new Float64Array(columns);
    this.keptReal = new Float64Array(columns);
    this.keptImag = new Float64Array(columns);
    this.sampleReal = new Float64Array(columns * MOST_ROWS);
    this.sampleImag = new Float64Array(columns * MOST_ROWS);
    this.amplitudes = new Float64Array(columns * MOST_ROWS);
  }

  /** Rows spread over the plane, clipped. @returns how many */
  private takeSample({ rows, columns, real, imag, usable }: Plane): number {
    const { sampleReal, sampleImag } = this;
    const step = Math.max(1, rows / MOST_ROWS);
    let taken = 0;
    for (let at = 0; at < rows && taken < MOST_ROWS; at += step) {
      const row = Math.floor(at);
      if (usable[row]! * 2 < columns) continue;
      const from = row * columns;
      const to = taken * columns;
      for (let c = 0; c < columns; c++) {
        sampleReal[to + c] = real[from + c]!;
        sampleImag[to + c] = imag[from + c]!;
      }
      taken += 1;
    }
    this.clip(taken * columns);
    return taken;
  }

  private clip(count: number): void {
    const { sampleReal, sampleImag, amplitudes } = this;
    const step = Math.max(1, Math.floor(count / CLIP_SAMPLES)) | 1;
    let known = 0;
    for (let i = 0; i < count; i += step) {
      const power = sampleReal[i]! * sampleReal[i]! + sampleImag[i]! * sampleImag[i]!;
      if (power > 0) amplitudes[known++] = power;
    }
    const limit = CLIP * CLIP * selectKth(amplitudes, known, known >>> 1);
    for (let i = 0; i < count; i++) {
      const power = sampleReal[i]! * sampleReal[i]! + sampleImag[i]! * sampleImag[i]!;
      if (!(power > limit)) continue;
      const factor = Math.sqrt(limit / power);
      sampleReal[i]! *= factor;
      sampleImag[i]! *= factor;
    }
  }

  private flatPower(rows: number, columns: number): number {
    const { sampleReal, sampleImag } = this;
    let power = 0;
    for (let row = 0; row < rows; row++) {
      let re = 0;
      let im = 0;
      for (let i = row * columns; i < (row + 1) * columns; i++) {
        re += sampleReal[i]!;
        im += sampleImag[i]!;
      }
      power += (re * re + im * im) / columns;
    }
    return power;
  }

  /** A phase that runs evenly along the band, as a delay gives it: a start that does not cancel. */
  private startWithSlope(rows: number, columns: number): void {
    const { sampleReal: x, sampleImag: y } = this;
    let re = 0;
    let im = 0;
    for (let row = 0; row < rows; row++) {
      for (let i = row * columns; i < (row + 1) * columns - 1; i++) {
        re += x[i + 1]! * x[i]! + y[i + 1]! * y[i]!;
        im += y[i + 1]! * x[i]! - x[i + 1]! * y[i]!;
      }
    }
    const slope = Math.atan2(im, re);
    for (let c = 0; c < columns; c++) {
      this.real[c] = Math.cos(slope * c);
      this.imag[c] = Math.sin(slope * c);
    }
  }

  /** One power iteration. @returns power that the shape before it takes */
  private iterate(rows: number, columns: number): number {
    const { real, imag, size, sampleReal, sampleImag } = this;
    const nextReal = this.amplitudes;
    const nextImag = this.amplitudes.subarray(columns);
    nextReal.fill(0, 0, columns);
    nextImag.fill(0, 0, columns);
    let norm = 0;
    for (let c = 0; c < columns; c++) norm += real[c]! * real[c]! + imag[c]! * imag[c]!;
    let power = 0;
    for (let row = 0; row < rows; row++) {
      const at = row * columns;
      let re = 0;
      let im = 0;
      for (let c = 0; c < columns; c++) {
        re += real[c]! * sampleReal[at + c]! + imag[c]! * sampleImag[at + c]!;
        im += real[c]! * sampleImag[at + c]! - imag[c]! * sampleReal[at + c]!;
      }
      power += (re * re + im * im) / norm;
      for (let c = 0; c < columns; c++) {
        nextReal[c]! += re * sampleReal[at + c]! + im * sampleImag[at + c]!;
        nextImag[c]! += re * sampleImag[at + c]! - im * sampleReal[at + c]!;
      }
    }
    let next = 0;
    for (let c = 0; c < columns; c++) next += nextReal[c]! ** 2 + nextImag[c]! ** 2;
    const scale = next > 0 ? Math.sqrt(columns / next) : 0;
    for (let c = 0; c < columns; c++) {
      real[c] = nextReal[c]! * scale;
      imag[c] = nextImag[c]! * scale;
      size[c] = real[c]! * real[c]! + imag[c]! * imag[c]!;
    }
    return power;
  }

  /** Whether the amplitude of the shape turns from one integration to the next no faster than the sky. */
  private isSky({ rows, columns, real, imag }: Plane, swiftest: number): boolean {
    const amplitude = (row: number): [number, number] => {
      let re = 0;
      let im = 0;
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        re += this.real[c]! * real[i]! + this.imag[c]! * imag[i]!;
        im += this.real[c]! * imag[i]! - this.imag[c]! * real[i]!;
      }
      return [re, im];
    };
    const step = Math.max(2, Math.floor(rows / MOST_ROWS));
    let turnReal = 0;
    let turnImag = 0;
    let power = 0;
    for (let row = 0; row + 1 < rows; row += step) {
      const [ar, ai] = amplitude(row);
      const [br, bi] = amplitude(row + 1);
      turnReal += br * ar + bi * ai;
      turnImag += bi * ar - br * ai;
      power += 0.5 * (ar * ar + ai * ai + br * br + bi * bi);
    }
    return (
      Math.hypot(turnReal, turnImag) > LEAST_COHERENCE * power &&
      Math.abs(Math.atan2(turnImag, turnReal)) < swiftest + STILL
    );
  }

  private spread(columns: number): number {
    let square = 0;
    let fourth = 0;
    for (let c = 0; c < columns; c++) {
      square += this.size[c]!;
      fourth += this.size[c]! ** 2;
    }
    return fourth > 0 ? (square * square) / (columns * fourth) : 0;
  }
}

/** Root of the mean power that one amplitude a row takes, less the noise in it. */
function sourceAmplitude(power: number, rows: number, columns: number, noise: number): number {
  const excess = power / (rows * columns) - noise / columns;
  return excess > 0 ? Math.sqrt(excess) : 0;
}
