/**
 * The kernel that carries a sample at any (u, v) onto the cells around it, and its transform, by which the image is
 * divided. A Kaiser-Bessel window on a grid twice as fine as needed errs by some 1e-5 of the peak.
 * @see Beatty, Nishimura & Pauly 2005, IEEE Trans. Med. Imaging 24, 799 (Eq. 3 and 5)
 */

/** Cells that a sample reaches. */
export const KERNEL_WIDTH = 6;
const OVERSAMPLING = 2;
const BETA = Math.PI * Math.sqrt(((KERNEL_WIDTH / OVERSAMPLING) * (OVERSAMPLING - 0.5)) ** 2 - 0.8);
/** Table entries a cell, read by linear interpolation. */
const FINENESS = 2048;

const table = Float64Array.from({ length: (KERNEL_WIDTH / 2) * FINENESS + 2 }, (_, i) => {
  const x = (2 * i) / FINENESS / KERNEL_WIDTH;
  return x > 1 ? 0 : besselI0(BETA * Math.sqrt(1 - x * x)) / KERNEL_WIDTH;
});

/** @param distance cells from the sample */
export function kernelAt(distance: number): number {
  const at = Math.abs(distance) * FINENESS;
  const low = Math.floor(at);
  if (low + 1 >= table.length) return 0;
  return table[low]! + (at - low) * (table[low + 1]! - table[low]!);
}

/** Transform of the kernel at `x` of the image, a share of the padded side: -1/4..1/4 where the image is. */
export function kernelTransform(x: number): number {
  const square = BETA * BETA - (Math.PI * KERNEL_WIDTH * x) ** 2;
  if (square > 1e-12) return Math.sinh(Math.sqrt(square)) / Math.sqrt(square);
  const root = Math.sqrt(-square);
  return root < 1e-6 ? 1 : Math.sin(root) / root;
}

/** Modified Bessel function of order 0 by its series (Abramowitz & Stegun 1964, 9.6.12). */
function besselI0(x: number): number {
  let term = 1;
  let sum = 1;
  for (let k = 1; k < 200; k++) {
    term *= (x / 2 / k) ** 2;
    sum += term;
    if (term < sum * 1e-17) break;
  }
  return sum;
}
