/**
 * The dirty beam of weighted uv cells by fast Fourier transforms: B(l, m) = sum T cos 2 pi (u l + v m) / sum T.
 * Only the part of the plane that is asked for is transformed, and only half of it, since B(-l, -m) = B(l, m).
 */
import FFT from "fft.js";
import { fillWave } from "./legendre.ts";
import type { FilledCells } from "./moment-grid.ts";

/** Middle of the beam: l = (column - reach) x cell, m = row x cell; negative m is the same turned half round. */
export interface HalfBeam {
  /** pixels from the centre to the edge */
  readonly reach: number;
  /** radians */
  readonly cell: number;
  /** (rows: reach + 1) x (columns: 2 reach + 1), fraction of the peak */
  readonly pixels: Float64Array;
}

export function beamPixel(beam: HalfBeam, column: number, row: number): number {
  const { reach, pixels } = beam;
  return row >= 0
    ? pixels[row * (2 * reach + 1) + column + reach]!
    : pixels[-row * (2 * reach + 1) - column + reach]!;
}

/** Transforms of one size, with their tables and scratch; not to be shared between calls that overlap. */
export class BeamTransform {
  /** pixels across the field, a power of two */
  readonly size: number;
  private readonly fft: FFT;
  private readonly input: Float64Array;
  private readonly output: Float64Array;
  private scratch = new Float64Array(0);

  constructor(size: number) {
    this.size = size;
    this.fft = new FFT(size);
    this.input = new Float64Array(2 * size);
    this.output = new Float64Array(2 * size);
  }

  /**
   * @param factors (cells) imaging factor of each cell
   * @param reach pixels from the centre wanted; the beam is right to the moments' accuracy inside the field
   */
  beam(cells: FilledCells, factors: Float64Array, reach: number): HalfBeam {
    const { order, field } = cells.form;
    const waves = wavesAt(reach, this.size, order);
    const along = this.transformColumns(cells, factors, reach, waves);
    const pixels = this.transformRows(along, cells.form.half + 1, order, reach, waves);
    let total = 0;
    for (let i = 0; i < cells.count; i++) total += factors[i]! * cells.weight[i]!;
    for (let i = 0; i < pixels.length; i++) pixels[i]! /= total;
    return { reach, cell: field / this.size, pixels };
  }

  /**
   * Along v: for each order a in u, row m and column iu, the sum over iv and over the orders in v.
   * @returns ((order + 1) x (reach + 1) x columns) complex
   */
  private transformColumns(
    cells: FilledCells,
    factors: Float64Array,
    reach: number,
    waves: Float64Array,
  ): Float64Array {
    const { order, half } = cells.form;
    const columns = half + 1;
    const along = this.clearedScratch(2 * (order + 1) * (reach + 1) * columns);
    for (let start = 0; start < cells.count; ) {
      const iu = cells.iu[start]!;
      let end = start;
      while (end < cells.count && cells.iu[end] === iu) end += 1;
      for (let a = 0, first = 0; a <= order; first += order - a + 1, a++) {
        for (let b = 0; b <= order - a; b += 2) {
          const second = b + 1 <= order - a;
          this.loadColumn(cells, factors, start, end, first + b, second);
          this.fft.transform(this.output, this.input);
          this.spreadColumn(along, a * (reach + 1) * columns + iu, columns, reach, b, second, waves, order);
        }
      }
      start = end;
    }
    return along;
  }

  /** Megabytes that every beam of a size needs again. */
  private clearedScratch(length: number): Float64Array {
    if (this.scratch.length < length) this.scratch = new Float64Array(length);
    else this.scratch.fill(0, 0, length);
    return this.scratch;
  }

  /** Two moments of one column at once, as the real and the imaginary part. */
  private loadColumn(
    cells: FilledCells,
    factors: Float64Array,
    start: number,
    end: number,
    moment: number,
    second: boolean,
  ): void {
    const { input, size } = this;
    const moments = cells.moments.length / cells.count;
    input.fill(0);
    for (let i = start; i < end; i++) {
      const at = 2 * ((cells.iv[i]! + size) % size);
      input[at]! += factors[i]! * cells.moments[i * moments + moment]!;
      if (second) input[at + 1]! += factors[i]! * cells.moments[i * moments + moment + 1]!;
    }
  }

  /** Take the two transforms apart, and add each at its order's wave along m. */
  private spreadColumn(
    along: Float64Array,
    to: number,
    columns: number,
    reach: number,
    b: number,
    second: boolean,
    waves: Float64Array,
    order: number,
  ): void {
    const { output, size } = this;
    for (let row = 0; row <= reach; row++) {
      // The forward transform has exp(-i...): the wanted exp(+i...) is at the mirrored place.
      const at = 2 * ((size - (row % size)) % size);
      const mirror = 2 * (row % size);
      const zr = output[at]!;
      const zi = output[at + 1]!;
      const cr = output[mirror]!;
      const ci = -output[mirror + 1]!;
      const wave = (row + reach) * (order + 1) + b;
      const target = 2 * (to + row * columns);
      addPower(along, target, (zr + cr) / 2, (zi + ci) / 2, b, waves[wave]!);
      if (second) addPower(along, target, (zi - ci) / 2, (cr - zr) / 2, b + 1, waves[wave + 1]!);
    }
  }

  /** Along u: the real part of the sum over iu and over the orders in u; two orders at once. */
  private transformRows(
    along: Float64Array,
    columns: number,
    order: number,
    reach: number,
    waves: Float64Array,
  ): Float64Array {
    const { input, output, size } = this;
    const width = 2 * reach + 1;
    const pixels = new Float64Array((reach + 1) * width);
    for (let row = 0; row <= reach; row++) {
      for (let a = 0; a <= order; a += 2) {
        input.fill(0);
        this.loadRow(along, 2 * (a * (reach + 1) + row) * columns, columns, a, false);
        if (a < order) this.loadRow(along, 2 * ((a + 1) * (reach + 1) + row) * columns, columns, a + 1, true);
        this.fft.transform(output, input);
        for (let column = -reach; column <= reach; column++) {
          const at = 2 * ((((size - column) % size) + size) % size);
          const wave = (column + reach) * (order + 1) + a;
          const odd = a < order ? output[at + 1]! * waves[wave + 1]! : 0;
          pixels[row * width + column + reach]! += output[at]! * waves[wave]! + odd;
        }
      }
    }
    return pixels;
  }

  /** One order's row, times i^a, made Hermitian so that its transform is real; times i when `imaginary`. */
  private loadRow(along: Float64Array, from: number, columns: number, a: number, imaginary: boolean): void {
    const { input, size } = this;
    for (let iu = 0; iu < columns; iu++) {
      const re = along[from + 2 * iu]!;
      const im = along[from + 2 * iu + 1]!;
      if (re === 0 && im === 0) continue;
      // i^a x (re + i im)
      const turn = a & 3;
      const xr = turn === 0 ? re : turn === 1 ? -im : turn === 2 ? -re : im;
      const xi = turn === 0 ? im : turn === 1 ? re : turn === 2 ? -im : -re;
      const at = 2 * iu;
      const mirror = 2 * ((size - iu) % size);
      if (imaginary) {
        input[at]! -= xi / 2;
        input[at + 1]! += xr / 2;
        input[mirror]! += xi / 2;
        input[mirror + 1]! += xr / 2;
      } else {
        input[at]! += xr / 2;
        input[at + 1]! += xi / 2;
        input[mirror]! += xr / 2;
        input[mirror + 1]! -= xi / 2;
      }
    }
  }
}

/** Add i^b x wave x (re + i im). */
function addPower(to: Float64Array, at: number, re: number, im: number, b: number, wave: number): void {
  const turn = b & 3;
  to[at]! += wave * (turn === 0 ? re : turn === 1 ? -im : turn === 2 ? -re : im);
  to[at + 1]! += wave * (turn === 0 ? im : turn === 1 ? re : turn === 2 ? -im : -re);
}

/** ((2 reach + 1) x (order + 1)) (2k+1) j_k(pi x) at each pixel from -reach to reach. */
function wavesAt(reach: number, size: number, order: number): Float64Array {
  const waves = new Float64Array((2 * reach + 1) * (order + 1));
  const values = new Float64Array(order + 1);
  for (let pixel = -reach; pixel <= reach; pixel++) {
    fillWave(pixel / size, order, values);
    waves.set(values, (pixel + reach) * (order + 1));
  }
  return waves;
}
