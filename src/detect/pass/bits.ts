/** One bit a sample: (cells of the tracks x samples of a row). */

export class SampleBits {
  readonly cells: number;
  readonly rowSamples: number;
  readonly words: number;
  readonly bits: Uint32Array<ArrayBuffer>;

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

  /** Set the places of a cell that are set in row `row` of (rows x words). */
  setRow(cell: number, rows: Uint32Array, row: number): void {
    const { words, bits } = this;
    for (let w = 0; w < words; w++) bits[cell * words + w]! |= rows[row * words + w]!;
  }

  clear(cell: number, sample: number): void {
    this.bits[cell * this.words + (sample >>> 5)]! &= ~(1 << (sample & 31));
  }

  has(cell: number, sample: number): boolean {
    return ((this.bits[cell * this.words + (sample >>> 5)]! >>> (sample & 31)) & 1) === 1;
  }

  /** Call for each bit set in a cell from `first` to before `end`, ascending. */
  each(cell: number, first: number, end: number, visit: (sample: number) => void): void {
    const at = cell * this.words;
    for (let w = first >>> 5; w <= (end - 1) >>> 5; w++) {
      let word = this.bits[at + w]!;
      while (word !== 0) {
        const bit = 31 - Math.clz32(word & -word);
        word &= word - 1;
        const sample = w * 32 + bit;
        if (sample >= first && sample < end) visit(sample);
      }
    }
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
