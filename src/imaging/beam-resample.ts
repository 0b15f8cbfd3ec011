/**
 * The beam between its pixels. It is band-limited, and sampled above its band, so that sincs under a window give it to
 * about 1e-3 (Kaiser 1974).
 */
import { beamPixel, type HalfBeam } from "./beam-transform.ts";

/** Half width of the interpolation kernel: pixels that must lie on every side. */
export const KERNEL = 6;

/** The beam at a place in pixels from the centre. */
export function interpolatedPixel(beam: HalfBeam, column: number, row: number): number {
  const c0 = Math.floor(column);
  const r0 = Math.floor(row);
  const alongRow = weightsAt(column - c0);
  const alongColumn = weightsAt(row - r0);
  let sum = 0;
  for (let r = 0; r < 2 * KERNEL; r++) {
    let line = 0;
    for (let c = 0; c < 2 * KERNEL; c++) {
      line += alongRow[c]! * beamPixel(beam, c0 + c - KERNEL + 1, r0 + r - KERNEL + 1);
    }
    sum += alongColumn[r]! * line;
  }
  return sum;
}

/**
 * The middle of the beam with `finer` pixels for each of its own, to `middle` fine pixels from the centre on every side.
 * @returns (2 middle + 1)^2, row 0 south, column 0 west
 */
export function finerMiddle(beam: HalfBeam, middle: number, finer: number): Float32Array {
  const size = 2 * middle + 1;
  const fractions = Array.from({ length: finer }, (_, k) => weightsAt(k / finer));
  const placeOf = (fine: number) => {
    const whole = Math.floor((fine - middle) / finer);
    return { whole, weights: fractions[fine - middle - whole * finer]! };
  };
  const reach = Math.ceil(middle / finer) + KERNEL;
  // Along each row of the beam first, then across them.
  const lines = Array.from({ length: 2 * reach + 1 }, (_, r) => {
    const line = new Float64Array(size);
    for (let fine = 0; fine < size; fine++) {
      const { whole, weights } = placeOf(fine);
      for (let c = 0; c < 2 * KERNEL; c++) {
        line[fine]! += weights[c]! * beamPixel(beam, whole + c - KERNEL + 1, r - reach);
      }
    }
    return line;
  });
  const pixels = new Float32Array(size * size);
  for (let row = 0; row < size; row++) {
    const { whole, weights } = placeOf(row);
    for (let column = 0; column < size; column++) {
      let sum = 0;
      for (let r = 0; r < 2 * KERNEL; r++)
        sum += weights[r]! * lines[whole + r - KERNEL + 1 + reach]![column]!;
      pixels[row * size + column] = sum;
    }
  }
  return pixels;
}

/** (2 KERNEL) weights of the pixels from KERNEL - 1 before to KERNEL after, for a place that far beyond one of them. */
function weightsAt(fraction: number): Float64Array {
  const weights = new Float64Array(2 * KERNEL);
  let total = 0;
  for (let k = 0; k < weights.length; k++) {
    weights[k] = kernel(fraction - (k - KERNEL + 1));
    total += weights[k]!;
  }
  for (let k = 0; k < weights.length; k++) weights[k]! /= total;
  return weights;
}

/** Kaiser's window for a band up to 2/3 of the sampling's: errors of -65 dB. */
const KAISER = 6.2;

function kernel(x: number): number {
  const edge = (x / KERNEL) ** 2;
  if (edge >= 1) return 0;
  const window = besselI0(KAISER * Math.sqrt(1 - edge));
  const t = Math.PI * x;
  return x === 0 ? window : (window * Math.sin(t)) / t;
}

/** Modified Bessel function of order 0 by its power series. */
function besselI0(x: number): number {
  const quarter = (x * x) / 4;
  let term = 1;
  let sum = 1;
  for (let k = 1; term > 1e-12 * sum; k++) {
    term *= quarter / (k * k);
    sum += term;
  }
  return sum;
}
