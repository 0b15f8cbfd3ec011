/** Two-dimensional Fourier transforms of square planes whose side is a power of two. */
import FFT from "fft.js";

/** (side x side) complex numbers, row by row. */
export interface Plane {
  readonly side: number;
  readonly re: Float64Array;
  readonly im: Float64Array;
}

export function emptyPlane(side: number): Plane {
  return { side, re: new Float64Array(side * side), im: new Float64Array(side * side) };
}

/** Least power of two that is not below `length`, at least 2. */
export function powerAbove(length: number): number {
  return Math.max(2, 2 ** Math.ceil(Math.log2(length)));
}

/** Transforms of one size, with their tables and scratch. */
export class Fft2 {
  readonly side: number;
  private readonly fft: FFT;
  private readonly input: Float64Array;
  private readonly output: Float64Array;

  constructor(side: number) {
    this.side = side;
    this.fft = new FFT(side);
    this.input = new Float64Array(2 * side);
    this.output = new Float64Array(2 * side);
  }

  /**
   * In place: F(k) = sum f(x) exp(-2 pi i k x / side) on both axes, or with the other sign and without a factor.
   *
   * @param sign -1 forward, +1 backward (not divided by side^2)
   */
  transform(plane: Plane, sign: -1 | 1): void {
    const { side } = this;
    if (plane.side !== side) throw new RangeError(`a plane of ${plane.side}: expected ${side}`);
    for (let row = 0; row < side; row++) this.line(plane, row * side, 1, sign);
    for (let column = 0; column < side; column++) this.line(plane, column, side, sign);
  }

  private line({ re, im }: Plane, start: number, step: number, sign: -1 | 1): void {
    const { side, input, output, fft } = this;
    let any = false;
    for (let i = 0, at = start; i < side; i++, at += step) {
      const x = re[at]!;
      const y = im[at]!;
      if (x !== 0 || y !== 0) any = true;
      input[2 * i] = x;
      // The other sign is the conjugate of the transform of the conjugate.
      input[2 * i + 1] = sign < 0 ? y : -y;
    }
    // Grids are mostly empty: a row of zeros stays one.
    if (!any) return;
    fft.transform(output as unknown as number[], input as unknown as number[]);
    for (let i = 0, at = start; i < side; i++, at += step) {
      re[at] = output[2 * i]!;
      im[at] = sign < 0 ? output[2 * i + 1]! : -output[2 * i + 1]!;
    }
  }
}
