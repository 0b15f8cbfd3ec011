/**
 * Sums that come out the same to the last bit in whatever order their numbers are added and however they are merged.
 *
 * Each number is cut at fixed powers of two, 2^26 apart, into at most three pieces; pieces of one power add as whole
 * multiples of it, which doubles do exactly for the first 2^27 of them. A sum keeps the three highest powers that any of
 * its numbers reached: pieces below those are left out, and which these are depends on the numbers alone.
 * As in Demmel & Nguyen 2015, IEEE Trans. Comput. 64, 2060 (recalled). The sum is good to at least 2^-52 of its largest
 * number a number added.
 */

import { Arena, kernelMemory } from "../util/kernels/memory.ts";
import { addTo, EMPTY, exactKernels, LOWEST, PIECES, raise, UNITS } from "./kernels/exact.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

export class ExactSums {
  /** number of sums */
  length = 0;
  /** (length) power of the first piece; EMPTY for a sum of nothing but zeros */
  private top: Int16Array = new Int16Array(0);
  /** (length x PIECES) sums of pieces, highest power first */
  private pieces: Float64Array = new Float64Array(0);
  private readonly arena: Arena = new Arena(this);
  /** addresses of these */
  private topAt = 0;
  private piecesAt = 0;

  constructor(length: number) {
    if (length > 0) this.place(length);
  }

  /** Bytes a sum takes. */
  static readonly BYTES = 2 + 8 * PIECES;

  /** Make room for more sums, which begin at 0. */
  grow(length: number): void {
    this.place(length);
  }

  private place(length: number): void {
    const { top, pieces, topAt, piecesAt } = this;
    this.topAt = this.arena.require(2 * length);
    this.piecesAt = this.arena.require(8 * PIECES * length);
    const { buffer } = kernelMemory.heap.u8;
    this.top = new Int16Array(buffer, this.topAt, length);
    this.pieces = new Float64Array(buffer, this.piecesAt, length * PIECES);
    this.top.set(top);
    this.top.fill(EMPTY, top.length);
    this.pieces.set(pieces);
    this.pieces.fill(0, pieces.length);
    if (this.length > 0) {
      this.arena.release(topAt);
      this.arena.release(piecesAt);
    }
    this.length = length;
  }

  /** Give the memory back. Nothing can be asked or added after. */
  release(): void {
    this.arena.release();
    this.length = 0;
  }

  /** The first `length` of them, copied: the kernels' memory stays with this thread. */
  state(length: number): StateRecord {
    return { top: this.top.slice(0, length), pieces: this.pieces.slice(0, length * PIECES) };
  }

  restore(from: StateReader, length: number): void {
    const top = from.array(Int16Array, "top", length);
    for (const power of top) {
      if (power !== EMPTY && !(power >= LOWEST + PIECES && power < LOWEST + UNITS.length)) {
        throw from.error(`there is no power ${power}`, "top");
      }
    }
    const pieces = from.finite(Float64Array, "pieces", length * PIECES);
    this.release();
    this.top = top;
    this.pieces = pieces;
    if (length > 0) this.place(length);
  }

  /** @param value finite */
  add(index: number, value: number): void {
    addTo(this.top, this.pieces, index, value);
  }

  /**
   * Add number k of group g to sum first + g x each + k.
   *
   * @param values address in the kernels' memory of float64, finite
   * @param step   from one group to the next, numbers
   */
  addGroups(first: number, values: number, step: number, groups: number, each: number): void {
    const { topAt, piecesAt } = this;
    exactKernels.addExact(topAt + 2 * first, piecesAt + 8 * PIECES * first, values, step, groups, each);
  }

  /** Add a sum of another set to one of this. */
  merge(index: number, other: ExactSums, theirs: number): void {
    const power = other.top[theirs]!;
    if (power === EMPTY) return;
    raise(this.top, this.pieces, index, power);
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
