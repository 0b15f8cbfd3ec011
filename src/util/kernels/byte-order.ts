/**
 * Big-endian float32s, as FITS stores them, to numbers of this machine. Kernels take addresses of `kernelMemory`.
 */
import { kernelsOr } from "./compiled.ts";
import { kernelMemory } from "./memory.ts";

export interface ByteOrderKernels {
  /**
   * Rows of (real, imaginary, weight) triples to one array of each.
   *
   * @param from     address of the first triple, any; big-endian float32
   * @param stride   bytes from the first triple of a row to that of the next
   * @param samples  triples of a row
   * @param real     address of (rows x samples) float32, out, a multiple of 4; likewise imag and weight
   */
  splitTriples(
    from: number,
    stride: number,
    rows: number,
    samples: number,
    real: number,
    imag: number,
    weight: number,
  ): void;
  /** Rows of (real, imaginary) pairs likewise. */
  splitPairs(from: number, stride: number, rows: number, samples: number, real: number, imag: number): void;
  /** The weights of triples alone. */
  splitWeights(from: number, stride: number, rows: number, samples: number, weight: number): void;
}

export const plainByteOrder: ByteOrderKernels = {
  splitTriples(from, stride, rows, samples, real, imag, weight) {
    const { u32, u8 } = kernelMemory.heap;
    const view = new DataView(u8.buffer);
    // As whole numbers, so that no bit of a NaN is lost.
    let out = 0;
    for (let row = 0; row < rows; row++) {
      const start = from + row * stride;
      const end = start + 12 * samples;
      for (let at = start; at < end; at += 12, out++) {
        u32[real / 4 + out] = view.getUint32(at);
        u32[imag / 4 + out] = view.getUint32(at + 4);
        u32[weight / 4 + out] = view.getUint32(at + 8);
      }
    }
  },
  splitPairs(from, stride, rows, samples, real, imag) {
    const { u32, u8 } = kernelMemory.heap;
    const view = new DataView(u8.buffer);
    let out = 0;
    for (let row = 0; row < rows; row++) {
      const start = from + row * stride;
      const end = start + 8 * samples;
      for (let at = start; at < end; at += 8, out++) {
        u32[real / 4 + out] = view.getUint32(at);
        u32[imag / 4 + out] = view.getUint32(at + 4);
      }
    }
  },
  splitWeights(from, stride, rows, samples, weight) {
    const { u32, u8 } = kernelMemory.heap;
    const view = new DataView(u8.buffer);
    let out = weight / 4;
    for (let row = 0; row < rows; row++) {
      const start = from + row * stride + 8;
      const end = start + 12 * samples;
      for (let at = start; at < end; at += 12) u32[out++] = view.getUint32(at);
    }
  },
};

export const byteOrder: ByteOrderKernels = kernelsOr(plainByteOrder);
