/** Measures of a plane's residual over a block of its rows: waves along the band, tilt, and how badly it is described. */
import type { Bandpass } from "./bandpass.ts";
import type { Plane } from "./plane.ts";

/** Rows of a block in which slopes are sought. */
const WAVE_ROWS = 16;
/** Residuals are clipped at this power while slopes are sought. */
const CLIP = 9;
/** Mean of ln(1 + p/2) over exponential p: e^2 E1(2). */
export const NOISE_COST = 0.36132862;

/** Power over that of noise that the best of many slopes must have in a block of so many rows. */
export function leastPower(rows: number): number {
  return 1 + 5 / Math.sqrt(Math.min(rows, WAVE_ROWS));
}

/** Power of the clipped residual in waves of one slope, over that of noise. */
export function wavePower(
  plane: Plane,
  { real: bandReal, imag: bandImag, size }: Bandpass,
  first: number,
  last: number,
  noise: number,
  slope: number,
): number {
  const { columns, real, imag, modelReal, modelImag, held, power } = plane;
  const clip = CLIP * noise;
  const turnReal = Math.cos(slope);
  const turnImag = Math.sin(slope);
  let total = 0;
  let expected = 0;
  // Many rows tell no more of a slope than some of them.
  const step = Math.max(1, Math.floor((last - first) / WAVE_ROWS));
  for (let row = first; row < last; row += step) {
    let re = 0;
    let im = 0;
    let waveReal = 1;
    let waveImag = 0;
    for (let c = 0, i = row * columns; c < columns; c++, i++) {
      if (held[i] === 0) {
        const scale = power[i]! > clip ? Math.sqrt(clip / power[i]!) : 1;
        const x = (real[i]! - modelReal[i]!) * scale;
        const y = (imag[i]! - modelImag[i]!) * scale;
        const br = bandReal[c]! * waveReal - bandImag[c]! * waveImag;
        const bi = bandReal[c]! * waveImag + bandImag[c]! * waveReal;
        re += br * x + bi * y;
        im += br * y - bi * x;
        expected += size[c]!;
      }
      const next = waveReal * turnReal - waveImag * turnImag;
      waveImag = waveReal * turnImag + waveImag * turnReal;
      waveReal = next;
    }
    total += re * re + im * im;
  }
  return total / (expected * noise);
}

/** Mean step of phase from channel to channel over the shape of the band, radians. */
export function tiltOf(
  { columns, real, imag, held }: Plane,
  { real: br, imag: bi }: Bandpass,
  first: number,
  last: number,
): number {
  let re = 0;
  let im = 0;
  for (let row = first; row < last; row++) {
    let beforeRe = 0;
    let beforeIm = 0;
    for (let c = 0, i = row * columns; c < columns; c++, i++) {
      const good = held[i] === 0;
      const x = good ? br[c]! * real[i]! + bi[c]! * imag[i]! : 0;
      const y = good ? br[c]! * imag[i]! - bi[c]! * real[i]! : 0;
      re += x * beforeRe + y * beforeIm;
      im += y * beforeRe - x * beforeIm;
      beforeRe = x;
      beforeIm = y;
    }
  }
  return Math.atan2(im, re);
}

/**
 * How badly rows [first, last) are described: the sum of ln(1 + p/2) of their powers over noise, which goes on falling as
 * a bad fit gets better but does not let one outlier decide; and what noise alone would give.
 */
export function misfit(
  { columns, held, power }: Plane,
  first: number,
  last: number,
  noise: number,
): { cost: number; floor: number } {
  const scale = 0.5 / noise;
  let samples = 0;
  // One logarithm for a run of samples: their product stays far from the largest double.
  let cost = 0;
  let product = 1;
  for (let i = first * columns; i < last * columns; i++) {
    if (held[i] !== 0) continue;
    product *= 1 + power[i]! * scale;
    samples += 1;
    if (product < 1e150) continue;
    cost += Math.log(product);
    product = 1;
  }
  return { cost: cost + Math.log(product), floor: NOISE_COST * samples };
}
