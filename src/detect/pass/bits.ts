/** One bit a sample: (cells of the tracks x samples of a row). */

export class SampleBits {
  readonly cells: number;
  readonly rowSamples: number;
  readonly words: number;
  readonly bits: Uint32Array;

  constructor(cells: number, rowSamples: number) {
    this.cells = cells;
    this.rowSamples = rowSamples;
    this.words = Math.ceil(rowSamples / 32);
    this.bits = new Uint32Array(cells * this.words);
  }

  set(cell: number, sample: number): void {
    this.bits[cell * this.words + (sample >>> 5)]! |= 1 << (sample & 31);
  }

  /** Set the places of a cell that are set in `mask`, (words). */
  setAll(cell: number, mask: Uint32Array): void {
    const at = cell * this.words;
    for (let w = 0; w < mask.length; w++) this.bits[at + w]! |= mask[w]!;
  }

  clear(cell: number, sample: number): void {
    this.bits[cell * this.words + (sample >>> 5)]! &= ~(1 << (sample & 31));
  }

  has(cell: number, sample: number): boolean {
    return ((this.bits[cell * this.words + (sample >>> 5)]! >>> (sample & 31)) & 1) === 1;
  }

  /** Bits set in a cell at the places that are set in `mask`, (words). */
  count(cell: number, mask: Uint32Array): number {
    const { words, bits } = this;
    const at = cell * words;
    let count = 0;
    for (let w = 0; w < words; w++) count += ones(bits[at + w]! & mask[w]!);
    return count;
  }

  /** Bits set in all. */
  total(): number {
    let count = 0;
    for (const word of this.bits) count += ones(word);
    return count;
  }
}

/** Bits set in a 32-bit word (Warren 2013, Hacker's Delight, 2nd ed., figure 5-2). */
export function ones(word: number): number {
  let x = word - ((word >>> 1) & 0x55555555);
  x = (x & 0x33333333) + ((x >>> 2) & 0x33333333);
  x = (x + (x >>> 4)) & 0x0f0f0f0f;
  return Math.imul(x, 0x01010101) >>> 24;
}
