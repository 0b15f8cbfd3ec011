/** How many pixels a beam is. */
import type { PixelGaussian } from "../sky/patch.ts";

/** Integral of the Gaussian main lobe over its peak, pixels. */
export function beamPixels({ a, b, c }: PixelGaussian): number {
  return Math.PI / Math.sqrt(a * c - b * b);
}
