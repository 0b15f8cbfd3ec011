/** Distinct pairs of antennas, a bit each: what an array of thousands has millions of. */
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";

/** Higher antennas whose bits lie together, as a power of two. */
const BLOCK_BITS = 9;
const BLOCK_WORDS = 2 ** BLOCK_BITS / 32;
/** Blocks of one lower antenna: numbers have 32 bits. */
const BLOCKS = 2 ** (32 - BLOCK_BITS);

export class PairSet {
  size = 0;
  /** by lower antenna and block of the higher one */
  private readonly blocks = new Map<number, Uint32Array>();
  private lastKey = Number.NaN;
  private lastBlock: Uint32Array = new Uint32Array(BLOCK_WORDS);

  /** @param low, high antenna numbers, 32-bit integers */
  add(low: number, high: number): void {
    const block = this.blockOf(low * BLOCKS + (high >>> BLOCK_BITS));
    const word = (high >>> 5) & (BLOCK_WORDS - 1);
    const bit = 1 << (high & 31);
    if ((block[word]! & bit) !== 0) return;
    block[word]! |= bit;
    this.size += 1;
  }

  private blockOf(key: number): Uint32Array {
    if (key === this.lastKey) return this.lastBlock;
    let block = this.blocks.get(key);
    if (block === undefined) {
      block = new Uint32Array(BLOCK_WORDS);
      this.blocks.set(key, block);
    }
    this.lastKey = key;
    this.lastBlock = block;
    return block;
  }

  each(visit: (low: number, high: number) => void): void {
    for (const [key, words] of this.blocks) {
      const low = Math.floor(key / BLOCKS);
      const first = (key - low * BLOCKS) << BLOCK_BITS;
      for (const [w, word] of words.entries()) {
        for (let rest = word; rest !== 0; rest &= rest - 1) {
          visit(low, first + 32 * w + 31 - Math.clz32(rest & -rest));
        }
      }
    }
  }

  merge(other: PairSet): void {
    other.each((low, high) => this.add(low, high));
  }

  state(): StateRecord {
    const words = new Uint32Array(BLOCK_WORDS * this.blocks.size);
    for (const [i, block] of [...this.blocks.values()].entries()) words.set(block, i * BLOCK_WORDS);
    return { keys: Float64Array.from(this.blocks.keys()), words };
  }

  restore(from: StateReader): void {
    const keys = from.finite(Float64Array, "keys");
    const words = from.array(Uint32Array, "words", BLOCK_WORDS * keys.length);
    for (const [i, key] of keys.entries()) {
      if (!Number.isSafeInteger(key)) throw from.error(`${key} is no pair of antennas`, "keys");
      this.blockOf(key).set(words.subarray(i * BLOCK_WORDS, (i + 1) * BLOCK_WORDS));
    }
    this.each(() => {
      this.size += 1;
    });
  }
}
