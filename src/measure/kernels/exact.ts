/**
 * Numbers into exact sums, whose form and reason `exact-sums.ts` gives. All addresses are of `kernelMemory`.
 */
import { kernelsOr } from "../../util/kernels/compiled.ts";
import { kernelMemory } from "../../util/kernels/memory.ts";

/** Bits of a piece. */
export const WIDTH = 26;
export const PIECES = 3;
/** Exponents of doubles are -1074..1023: powers from 2^-1092 up, which a unit reaches by two factors. */
export const LOWEST = -42;
/** Of a sum of nothing but zeros. */
export const EMPTY = -32768;
/** Of 2^(26 power), the lowest first; the smallest double where that is less. */
export const UNITS = Float64Array.from({ length: 90 }, (_, i) => 2 ** Math.max(-1074, (i + LOWEST) * WIDTH));

export interface ExactKernels {
  /**
   * Add number k of group g to sum g x each + k.
   *
   * @param top    address of (sums) int16: power of the first piece, EMPTY
   * @param pieces address of (sums x PIECES) float64, highest power first
   * @param values address of float64, finite
   * @param step   from one group to the next, numbers
   * @param each   numbers of a group
   */
  addExact(top: number, pieces: number, values: number, step: number, groups: number, each: number): void;
}

const word = new Float64Array(1);
const words = new Uint32Array(word.buffer);
/** Index of the half of a double that holds its exponent. */
const HIGH = new Uint8Array(new Uint32Array([1]).buffer)[0] === 1 ? 1 : 0;

/** The power of a number's first piece: floor(exponent / WIDTH). */
function powerOf(value: number): number {
  word[0] = value;
  const exponent = ((words[HIGH]! >>> 20) & 2047) - 1023;
  return Math.max(LOWEST + PIECES, Math.floor(exponent / WIDTH));
}

/** Keep pieces up to `power`, dropping those that fall out at the low end. @param first place of the sum's pieces */
export function raise(top: Int16Array, pieces: Float64Array, index: number, power: number): void {
  const was = top[index]!;
  if (power <= was) return;
  const first = index * PIECES;
  const shift = was === EMPTY ? PIECES : Math.min(PIECES, power - was);
  for (let k = PIECES - 1; k >= 0; k--) {
    pieces[first + k] = k >= shift ? pieces[first + k - shift]! : 0;
  }
  top[index] = power;
}

/** @param value finite */
export function addTo(top: Int16Array, pieces: Float64Array, index: number, value: number): void {
  if (value === 0) return;
  let power = powerOf(value);
  raise(top, pieces, index, power);
  const highest = top[index]!;
  let rest = value;
  for (; power > highest - PIECES; power--) {
    const size = UNITS[power - LOWEST]!;
    const whole = Math.round(rest / size) * size;
    pieces[index * PIECES + highest - power]! += whole;
    rest -= whole;
    if (rest === 0) return;
  }
}

export const plainExact: ExactKernels = {
  addExact(top, pieces, values, step, groups, each) {
    const { f64 } = kernelMemory.heap;
    const sums = groups * each;
    const tops = new Int16Array(f64.buffer, top, sums);
    const all = new Float64Array(f64.buffer, pieces, sums * PIECES);
    for (let g = 0; g < groups; g++) {
      for (let k = 0; k < each; k++) addTo(tops, all, g * each + k, f64[values / 8 + g * step + k]!);
    }
  },
};

export const exactKernels: ExactKernels = kernelsOr(plainExact);
