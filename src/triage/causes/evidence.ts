/**
 * How much each sample puts into what is wrong with the image. With R the image without its sources and d the sample
 * without them, the sample adds T Re(d exp(2 pi i (u l + v m))) to the image, and T Re(d R^*(u, v)) to the power of R:
 * summed over samples that is all the power that the data account for, so that it can be shared out among them.
 */
import type { Visibilities } from "../sky/model.ts";
import { inner } from "../sky/residual.ts";
import type { Understanding } from "../sky/understand.ts";

export interface Evidence {
  readonly seen: Understanding;
  /** sum of squares of the image without its sources */
  readonly power: number;
  /** of it, what the noise of the data makes */
  readonly noisePower: number;
  /** pixels with a value */
  readonly pixels: number;
  /** (atoms) transform of the image without its sources */
  readonly imageRe: Float64Array;
  readonly imageIm: Float64Array;
  /** (atoms) power that each adds */
  readonly share: Float64Array;
  /** (atoms) power that its noise adds, by expectation */
  readonly noiseShare: Float64Array;
}

export function gatherEvidence(seen: Understanding): Evidence {
  const { atoms, transformer, residual, weights, image } = seen;
  const spectrum = transformer.spectrum(residual);
  const [imageRe, imageIm] = [new Float64Array(atoms.count), new Float64Array(atoms.count)];
  const noiseShare = new Float64Array(atoms.count);
  const pixels = image.known.reduce((sum, one) => sum + one, 0);
  const scale = seen.scale > 0 ? seen.scale : 1;
  let noisePower = 0;
  for (let k = 0; k < atoms.count; k++) {
    spectrum.read(atoms.cycles.x[k]!, atoms.cycles.y[k]!);
    imageRe[k] = spectrum.re;
    imageIm[k] = spectrum.im;
    const weight = weights[k]!;
    if (weight === 0) continue;
    const own = (pixels * scale * scale * weight * weight * atoms.noise) / atoms.weight[k]!;
    noiseShare[k] = Number.isFinite(own) ? own : 0;
    noisePower += noiseShare[k]!;
  }
  const power = inner(residual, residual);
  const share = sharesOf({ seen, imageRe, imageIm }, seen.rest);
  return { seen, power, noisePower, pixels, imageRe, imageIm, share, noiseShare };
}

/** The same evidence with sources that are better known. */
export function withRest(evidence: Evidence, rest: Visibilities): Evidence {
  return { ...evidence, share: sharesOf(evidence, rest) };
}

function sharesOf(
  { seen, imageRe, imageIm }: Pick<Evidence, "seen" | "imageRe" | "imageIm">,
  rest: Visibilities,
): Float64Array {
  const share = new Float64Array(seen.atoms.count);
  if (!seen.held) return share;
  for (let k = 0; k < share.length; k++) {
    share[k] = seen.scale * seen.weights[k]! * (rest.re[k]! * imageRe[k]! + rest.im[k]! * imageIm[k]!);
  }
  return share;
}

/** Power that samples add beyond their noise, of all the power that is beyond the noise. */
export function shareOf(evidence: Evidence, chosen: (k: number) => boolean): number {
  const { share, noiseShare } = evidence;
  let sum = 0;
  for (let k = 0; k < share.length; k++) if (chosen(k)) sum += share[k]! - noiseShare[k]!;
  return sum / excessOf(evidence);
}

/** Power beyond the noise; at least a twentieth of all, so that shares of next to nothing are not large. */
export function excessOf({ power, noisePower }: Pick<Evidence, "power" | "noisePower">): number {
  return Math.max(power - noisePower, power / 20);
}
