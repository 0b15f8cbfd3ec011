/**
 * Sums that come out the same to the last bit in whatever order their numbers are added and however they are merged.
 *
 * Each number is cut at fixed powers of two, 2^26 apart, into at most three pieces; pieces of one power add as whole
 * multiples of it, which doubles do exactly for the first 2^27 of them. A sum keeps the three highest powers that any of
 * its numbers reached: pieces below those are left out, and which these are depends on the numbers alone.
 * As in Demmel & Nguyen 2015, IEEE Trans. Comput. 64, 2060 (recalled). The sum is good to at least 2^-52 of its largest
 * number a number added.
 */

import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

const WIDTH = 26;
const PIECES = 3;
/** Exponents of doubles are -1074..1023: powers from 2^-1092 up, which `unit` reaches by two factors. */
const LOWEST = -42;
const EMPTY = -32768;

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

const UNITS = Float64Array.from({ length: 90 }, (_, i) => 2 ** Math.max(-1074, (i + LOWEST) * WIDTH));
function unit(power: number): number {
  return UNITS[power - LOWEST]!;
}

export class ExactSums {
  /** number of sums */
  length: number;
  /** (length) power of the first piece; EMPTY for a sum of nothing but zeros */
  private top: Int16Array;
  /** (length x PIECES) sums of pieces, highest power first */
  private pieces: Float64Array;

  constructor(length: number) {
    this.length = length;
    this.top = new Int16Array(length).fill(EMPTY);
    this.pieces = new Float64Array(length * PIECES);
  }

  /** Bytes a sum takes. */
  static readonly BYTES = 2 + 8 * PIECES;

  /** Make room for more sums, which begin at 0. */
  grow(length: number): void {
    const top = new Int16Array(length).fill(EMPTY);
    top.set(this.top);
    const pieces = new Float64Array(length * PIECES);
    pieces.set(this.pieces);
    this.top = top;
    this.pieces = pieces;
    this.length = length;
  }

  /** The first `length` of them. */
  state(length: number): StateRecord {
    return { top: this.top.subarray(0, length), pieces: this.pieces.subarray(0, length * PIECES) };
  }

  restore(from: StateReader, length: number): void {
    this.top = from.array(Int16Array, "top", length);
    for (const power of this.top) {
      if (power !== EMPTY && !(power >= LOWEST + PIECES && power < LOWEST + UNITS.length)) {
        throw from.error(`there is no power ${power}`, "top");
      }
    }
    this.pieces = from.finite(Float64Array, "pieces", length * PIECES);
    this.length = length;
  }

  /** @param value finite */
  add(index: number, value: number): void {
    if (value === 0) return;
    let power = powerOf(value);
    this.raise(index, power);
    const top = this.top[index]!;
    let rest = value;
    for (; power > top - PIECES; power--) {
      const size = unit(power);
      const whole = Math.round(rest / size) * size;
      this.pieces[index * PIECES + top - power]! += whole;
      rest -= whole;
      if (rest === 0) return;
    }
  }

  /** Keep pieces up to `power`, dropping those that fall out at the low end. */
  private raise(index: number, power: number): void {
    const top = this.top[index]!;
    if (power <= top) return;
    const first = index * PIECES;
    const shift = top === EMPTY ? PIECES : Math.min(PIECES, power - top);
    for (let k = PIECES - 1; k >= 0; k--) {
      this.pieces[first + k] = k >= shift ? this.pieces[first + k - shift]! : 0;
    }
    this.top[index] = power;
  }

  /** Add a sum of another set to one of this. */
  merge(index: number, other: ExactSums, theirs: number): void {
    const power = other.top[theirs]!;
    if (power === EMPTY) return;
    this.raise(index, power);
    const shift = this.top[index]! - power;
    for (let k = 0; k + shift < PIECES; k++) {
      this.pieces[index * PIECES + k + shift]! += other.pieces[theirs * PIECES + k]!;
    }
  }

  value(index: number): number {
    const first = index * PIECES;
    // From the lowest piece, so that it is not lost one piece at a time.
    let sum = 0;
    for (let k = PIECES - 1; k >= 0; k--) sum += this.pieces[first + k]!;
    return sum;
  }
}
