/**
 * Between samples at any (u, v) and the pixels of an image, both ways, by fast Fourier transforms. Samples are at cycles
 * a pixel (see `frame.ts`), so that neither the size nor the handedness of the pixels matters here.
 */
import { emptyPlane, Fft2, type Plane, powerAbove } from "./fft2.ts";
import { KERNEL_WIDTH, kernelAt, kernelTransform } from "./kernel.ts";

const HALF = KERNEL_WIDTH / 2;

export interface Frequencies {
  /** (samples) cycles a pixel along x and along y; beyond +-1/2 a sample is passed over */
  readonly x: Float64Array;
  readonly y: Float64Array;
}

/** For images of one size. Pixel (x, y) is counted from the middle one, (width >> 1, height >> 1). */
export class UvTransformer {
  readonly width: number;
  readonly height: number;
  /** of the padded grid */
  readonly side: number;
  private readonly fft: Fft2;
  private readonly plane: Plane;
  /** what pixels are divided by, along x and y */
  private readonly taperX: Float64Array;
  private readonly taperY: Float64Array;

  constructor(width: number, height: number) {
    this.width = width;
    this.height = height;
    this.side = powerAbove(2 * Math.max(width, height));
    this.fft = new Fft2(this.side);
    this.plane = emptyPlane(this.side);
    const taper = (length: number) =>
      Float64Array.from({ length }, (_, i) => kernelTransform((i - (length >> 1)) / this.side));
    this.taperX = taper(width);
    this.taperY = taper(height);
  }

  /**
   * sum of d exp(2 pi i (fx x + fy y)) over the samples: the real part is what they put into the image, the imaginary
   * part, with its sign turned, what they would put there times i.
   *
   * @param chosen which samples; all where it is null
   * @param imag   null where only the real part is wanted
   */
  toImage(
    at: Frequencies,
    re: ArrayLike<number>,
    im: ArrayLike<number>,
    chosen: Uint32Array | null,
    real: Float64Array,
    imag: Float64Array | null = null,
  ): void {
    const { plane, side } = this;
    plane.re.fill(0);
    plane.im.fill(0);
    const count = chosen === null ? at.x.length : chosen.length;
    for (let i = 0; i < count; i++) {
      const k = chosen === null ? i : chosen[i]!;
      this.spread(at.x[k]!, at.y[k]!, re[k]!, im[k]!);
    }
    this.fft.transform(plane, 1);
    const { width, height, taperX, taperY } = this;
    for (let y = 0; y < height; y++) {
      const row = wrapped(y - (height >> 1), side) * side;
      for (let x = 0; x < width; x++) {
        const from = row + wrapped(x - (width >> 1), side);
        const taper = taperX[x]! * taperY[y]!;
        real[y * width + x] = plane.re[from]! / taper;
        if (imag !== null) imag[y * width + x] = plane.im[from]! / taper;
      }
    }
  }

  private spread(fx: number, fy: number, re: number, im: number): void {
    if (!(Math.abs(fx) < 0.5 && Math.abs(fy) < 0.5)) return;
    const { side, plane } = this;
    const x = fx * side;
    const y = fy * side;
    const x0 = Math.ceil(x - HALF);
    const y0 = Math.ceil(y - HALF);
    for (let j = 0; j < KERNEL_WIDTH; j++) {
      const ky = kernelAt(y0 + j - y);
      const row = wrapped(y0 + j, side) * side;
      for (let i = 0; i < KERNEL_WIDTH; i++) {
        const k = ky * kernelAt(x0 + i - x);
        const to = row + wrapped(x0 + i, side);
        plane.re[to]! += k * re;
        plane.im[to]! += k * im;
      }
    }
  }

  /** The transform of an image, to be read at any frequency: sum of pixel x exp(-2 pi i (fx x + fy y)). */
  spectrum(pixels: Float64Array): Spectrum {
    const { width, height, side, taperX, taperY } = this;
    const plane = emptyPlane(side);
    for (let y = 0; y < height; y++) {
      const row = wrapped(y - (height >> 1), side) * side;
      for (let x = 0; x < width; x++) {
        plane.re[row + wrapped(x - (width >> 1), side)] = pixels[y * width + x]! / (taperX[x]! * taperY[y]!);
      }
    }
    this.fft.transform(plane, -1);
    return new Spectrum(plane);
  }

  /** The transform of an image on the grid itself, without the taper that `spectrum` takes out for reading between cells. */
  plainSpectrum(pixels: Float64Array): Plane {
    const { width, height, side } = this;
    const plane = emptyPlane(side);
    for (let y = 0; y < height; y++) {
      const row = wrapped(y - (height >> 1), side) * side;
      for (let x = 0; x < width; x++)
        plane.re[row + wrapped(x - (width >> 1), side)] = pixels[y * width + x]!;
    }
    this.fft.transform(plane, -1);
    return plane;
  }
}

export class Spectrum {
  private readonly plane: Plane;
  re = 0;
  im = 0;

  constructor(plane: Plane) {
    this.plane = plane;
  }

  /** Sets `re` and `im`; 0 beyond what the pixels sample. */
  read(fx: number, fy: number): void {
    this.re = 0;
    this.im = 0;
    if (!(Math.abs(fx) < 0.5 && Math.abs(fy) < 0.5)) return;
    const { side, re, im } = this.plane;
    const x = fx * side;
    const y = fy * side;
    const x0 = Math.ceil(x - HALF);
    const y0 = Math.ceil(y - HALF);
    for (let j = 0; j < KERNEL_WIDTH; j++) {
      const ky = kernelAt(y0 + j - y);
      const row = wrapped(y0 + j, side) * side;
      for (let i = 0; i < KERNEL_WIDTH; i++) {
        const k = ky * kernelAt(x0 + i - x);
        const from = row + wrapped(x0 + i, side);
        this.re += k * re[from]!;
        this.im += k * im[from]!;
      }
    }
  }
}

/** Sides are powers of two. */
function wrapped(index: number, side: number): number {
  return index & (side - 1);
}
