/** Finds the row that a sample belongs to: an open hash of baselines and times, in typed arrays of a bounded size. */
import { InputError, type Place } from "../../util/errors.ts";

export interface RowKey {
  /** MJD, days; NaN for all without a time */
  readonly time: number;
  readonly antenna1: number;
  readonly antenna2: number;
  /** whatever else tells rows apart, as one number: field, setup, sub-array */
  readonly rest: number;
}

/** Rows that are told apart wherever they stand: 28 bytes each. */
const MOST_ROWS = 1 << 23;
const FIRST_CAPACITY = 1 << 12;

export class RowIndex {
  readonly #most: number;
  #time = new Float64Array(FIRST_CAPACITY);
  #pair = new Float64Array(FIRST_CAPACITY);
  #rest = new Int32Array(FIRST_CAPACITY);
  /** row - `#base` + 1 of each slot; 0: empty */
  #slots = new Int32Array(2 * FIRST_CAPACITY);
  #count = 0;
  /** the row that index 0 stands for: rows before it are forgotten */
  #base = 0;
  /** rows of times before this are forgotten */
  #horizon = Number.NEGATIVE_INFINITY;
  #latest = Number.NEGATIVE_INFINITY;
  #inOrder = true;
  #lastRow = -1;

  /** @param most rows that are remembered */
  constructor(most = MOST_ROWS) {
    this.#most = most;
  }

  /** Rows met so far. */
  get rows(): number {
    return this.#base + this.#count;
  }

  /**
   * The row of `key`, or -1 where it is new: then it is the next row, and remembered.
   * @throws InputError when rows of it may have been forgotten
   */
  find(key: RowKey, where: () => Place): number {
    const { time, antenna1, antenna2, rest } = key;
    const pair = antenna1 * 65_536 + antenna2;
    const last = this.#lastRow - this.#base;
    if (last >= 0 && this.#is(last, time, pair, rest)) return this.#lastRow;
    let slot = this.#slotOf(time, pair, rest);
    for (let entry = this.#slots[slot]!; entry !== 0; entry = this.#slots[slot]!) {
      if (this.#is(entry - 1, time, pair, rest)) {
        this.#lastRow = this.#base + entry - 1;
        return this.#lastRow;
      }
      slot = (slot + 1) & (this.#slots.length - 1);
    }
    if (time < this.#horizon) throw outOfOrder(where());
    this.#add(time, pair, rest, slot, where);
    return -1;
  }

  #is(at: number, time: number, pair: number, rest: number): boolean {
    const other = this.#time[at]!;
    const sameTime = other === time || (Number.isNaN(other) && Number.isNaN(time));
    return sameTime && this.#pair[at] === pair && this.#rest[at] === rest;
  }

  #slotOf(time: number, pair: number, rest: number): number {
    WORDS_OF[0] = Number.isNaN(time) ? -1 : time;
    let hash = Math.imul(WORDS[0]!, 0x9e3779b1) ^ Math.imul(WORDS[1]!, 0x85ebca6b);
    hash ^= Math.imul(pair | 0, 0xc2b2ae35) ^ Math.imul(rest, 0x27d4eb2f);
    hash = Math.imul(hash ^ (hash >>> 15), 0x2c1b3c6d);
    return (hash ^ (hash >>> 13)) & (this.#slots.length - 1);
  }

  #add(time: number, pair: number, rest: number, slot: number, where: () => Place): void {
    if (time < this.#latest) this.#inOrder = false;
    const later = time > this.#latest;
    if (later) this.#latest = time;
    this.#time[this.#count] = time;
    this.#pair[this.#count] = pair;
    this.#rest[this.#count] = rest;
    this.#slots[slot] = this.#count + 1;
    this.#lastRow = this.#base + this.#count;
    this.#count += 1;
    if (this.#count >= this.#most) this.#forget(where);
    else if (this.#count === this.#time.length) this.#grow();
  }

  #grow(): void {
    const capacity = 2 * this.#time.length;
    const bigger = <T extends Float64Array | Int32Array>(old: T, made: T): T => {
      made.set(old);
      return made;
    };
    this.#time = bigger(this.#time, new Float64Array(capacity));
    this.#pair = bigger(this.#pair, new Float64Array(capacity));
    this.#rest = bigger(this.#rest, new Int32Array(capacity));
    this.#slots = new Int32Array(2 * capacity);
    this.#rehash();
  }

  #rehash(): void {
    this.#slots.fill(0);
    for (let at = 0; at < this.#count; at++) {
      let slot = this.#slotOf(this.#time[at]!, this.#pair[at]!, this.#rest[at]!);
      while (this.#slots[slot] !== 0) slot = (slot + 1) & (this.#slots.length - 1);
      this.#slots[slot] = at + 1;
    }
  }

  /** As long as times only rise, rows before the latest time are done with. */
  #forget(where: () => Place): void {
    let kept = this.#count;
    while (kept > 0 && this.#time[kept - 1] === this.#latest) kept--;
    if (!this.#inOrder || kept === 0) throw outOfOrder(where());
    this.#time.copyWithin(0, kept, this.#count);
    this.#pair.copyWithin(0, kept, this.#count);
    this.#rest.copyWithin(0, kept, this.#count);
    this.#base += kept;
    this.#count -= kept;
    this.#horizon = this.#latest;
    this.#rehash();
  }
}

const WORDS_OF = new Float64Array(1);
const WORDS = new Int32Array(WORDS_OF.buffer);

function outOfOrder(place: Place): InputError {
  return new InputError(
    "the samples of a baseline and time are scattered over too many rows to be gathered",
    place,
    "Sort the table by time, then by antenna1 and antenna2",
  );
}
