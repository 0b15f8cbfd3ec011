/**
 * A block as the accumulators take it: each row's baseline, of each sample what it is and its amplitude, of each
 * product of a row its sums over channels. Made once a block, so that no accumulator decides again what a usable sample
 * is, and samples are looked at once. All of it lies in the kernels' memory.
 */
import type { SampleBlock, Shape } from "../dataset/dataset.ts";
import { Arena, kernelMemory } from "../util/kernels/memory.ts";
import type { BaselineIndex } from "./baseline-index.ts";
import { AUTOCORRELATION, KINDS, SUMS, USABLE } from "./kernels/layout.ts";
import { prepareKernels } from "./kernels/prepare.ts";
import { takeWideProduct } from "./kernels/wide-row.ts";

export * from "./kernels/layout.ts";

/** Addresses of a block's arrays. */
export interface PreparedPlaces {
  readonly real: number;
  readonly imag: number;
  readonly weight: number;
  readonly bits: number;
  readonly sums: number;
  readonly counts: number;
  readonly baseline: number;
  readonly sign: number;
  readonly whole: number;
}

export class PreparedBlock {
  readonly shape: Shape;
  readonly rowSamples: number;
  readonly products: number;
  block!: SampleBlock;
  rows = 0;
  /** (rows) number in the BaselineIndex, or AUTOCORRELATION: nothing below is filled for such a row */
  baseline: Int32Array = new Int32Array(0);
  /** (rows) 1, or -1 where the row is stored with the higher antenna first: conjugate it, negate its u, v, w */
  sign: Int8Array = new Int8Array(0);
  /** (rows x samples of a row) the bits of the float32 amplitude of a usable sample; of others minus what they are */
  bits: Int32Array = new Int32Array(0);
  /** (rows x products x SUMS) of the visibility with the lower antenna first */
  sums: Float64Array = new Float64Array(0);
  /** (rows x products x KINDS) */
  counts: Uint32Array = new Uint32Array(0);
  /** (rows) 1 where every sample is usable */
  whole: Uint8Array = new Uint8Array(0);
  /** where these are, and the samples of the block */
  at!: PreparedPlaces;
  private readonly arena: Arena = new Arena(this);
  /** rows that there is room for */
  private room = -1;
  /** address of room for the samples of blocks that are kept elsewhere; undefined before the first */
  private copies: number | undefined;

  constructor(shape: Shape) {
    this.shape = shape;
    this.rowSamples = shape.subbands * shape.channels * shape.polarizations;
    this.products = shape.subbands * shape.polarizations;
  }

  take(block: SampleBlock, index: BaselineIndex): void {
    this.block = block;
    this.rows = block.rows;
    this.reserve(block.rows);
    const { baseline, sign } = this;
    const { antenna1, antenna2 } = block;
    for (let row = 0; row < block.rows; row++) {
      const first = antenna1[row]!;
      const second = antenna2[row]!;
      sign[row] = first > second ? -1 : 1;
      baseline[row] = first === second ? AUTOCORRELATION : index.indexOf(first, second);
    }
    this.placeSamples(block);
    this.prepare();
  }

  /** Give back the memory, all of it. Room is made again for the next block. */
  release(): void {
    this.arena.release();
    this.room = -1;
    this.copies = undefined;
  }

  private prepare(): void {
    const { at, rows } = this;
    const { subbands, channels, polarizations } = this.shape;
    const kernels = prepareKernels(polarizations);
    for (let from = 0; from < rows; from++) {
      from = kernels.prepareRows(
        from,
        rows,
        subbands,
        channels,
        polarizations,
        at.real,
        at.imag,
        at.weight,
        at.baseline,
        at.sign,
        at.bits,
        at.sums,
        at.counts,
        at.whole,
      );
      if (from < rows) this.takeWideRow(from);
    }
  }

  private takeWideRow(row: number): void {
    const { at, products, rowSamples, counts } = this;
    const { channels, polarizations } = this.shape;
    let usable = 0;
    for (let k = 0; k < products; k++) {
      const subband = Math.floor(k / polarizations);
      const first = 4 * (row * rowSamples + subband * channels * polarizations + (k % polarizations));
      const product = row * products + k;
      const place = {
        real: at.real + first,
        imag: at.imag + first,
        weight: at.weight + first,
        bits: at.bits + first,
        sums: at.sums + 8 * SUMS * product,
        counts: at.counts + 4 * KINDS * product,
      };
      takeWideProduct(place, channels, polarizations, this.sign[row]!);
      usable += counts[product * KINDS + USABLE]!;
    }
    this.whole[row] = usable === rowSamples ? 1 : 0;
  }

  /** The block's samples where the kernels reach them: where they are, or copied. */
  private placeSamples({ real, imag, weight, rows }: SampleBlock): void {
    const columns = [real, imag, weight];
    const known = columns.map((column) => kernelMemory.addressOf(column));
    const length = rows * this.rowSamples;
    if (known.includes(undefined)) {
      this.copies ??= this.arena.require(4 * 3 * this.room * this.rowSamples);
      const { f32 } = kernelMemory.heap;
      for (const [k, column] of columns.entries()) {
        known[k] = this.copies + 4 * k * length;
        f32.set(column.subarray(0, length), known[k]! / 4);
      }
    }
    this.at = { ...this.at, real: known[0]!, imag: known[1]!, weight: known[2]! };
  }

  private reserve(rows: number): void {
    if (this.room >= rows) return;
    this.release();
    this.room = rows;
    const { arena, rowSamples, products } = this;
    const at = {
      real: 0,
      imag: 0,
      weight: 0,
      bits: arena.require(4 * rows * rowSamples),
      sums: arena.require(8 * rows * products * SUMS),
      counts: arena.require(4 * rows * products * KINDS),
      baseline: arena.require(4 * rows),
      sign: arena.require(rows),
      whole: arena.require(rows),
    };
    const { buffer } = kernelMemory.heap.u8;
    this.at = at;
    this.bits = new Int32Array(buffer, at.bits, rows * rowSamples);
    this.sums = new Float64Array(buffer, at.sums, rows * products * SUMS);
    this.counts = new Uint32Array(buffer, at.counts, rows * products * KINDS);
    this.baseline = new Int32Array(buffer, at.baseline, rows);
    this.sign = new Int8Array(buffer, at.sign, rows);
    this.whole = new Uint8Array(buffer, at.whole, rows);
  }
}
