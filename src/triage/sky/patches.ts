/** How a source may look in the image: as restored after deconvolution, or with the sidelobes of the dirty beam. */
import type { Weighting } from "../../dataset/plan-request.ts";
import type { SkyImage } from "../image/sky-image.ts";
import type { Atoms } from "../samples/atoms.ts";
import type { ImageFrame } from "../uv/frame.ts";
import { type Frequencies, UvTransformer } from "../uv/transformer.ts";
import { imagingWeights } from "../uv/weighting.ts";
import { type Cluster, clustersOf, coreGaussian } from "./clusters.ts";
import { beamMoments, gaussianOfMoments, gaussianPatch, type Patch, type PixelGaussian } from "./patch.ts";
import { peel } from "./peel.ts";

export interface Reading {
  /** true: deconvolved and restored with a Gaussian, as far as its sources show */
  readonly deconvolved: boolean;
  readonly weighting: Weighting;
  /** imaging weights, a sum of 1 */
  readonly weights: Float64Array;
  readonly clusters: readonly Cluster[];
  /** rms of what the sources leave */
  readonly rms: number;
}

export const WEIGHTINGS: readonly Weighting[] = [
  { kind: "natural" },
  { kind: "robust", robust: 0 },
  { kind: "uniform" },
];

const RESTORED = { gain: 0.5, most: 600, sigmas: 5, balance: 1.3 };
const DIRTY = { gain: 0.2, most: 400, sigmas: 5, balance: 1.15 };
/** A dirty image is taken for one only where that leaves this much less. */
const CLEARLY_LESS = 0.9;
/** A grid twice as large as the image is made for the beam up to here. */
const LARGEST_DOUBLED = 512;

/** The main lobe as pixels see it: of the header, else of the brightest source. */
export function mainLobe(image: SkyImage, frame: ImageFrame): PixelGaussian | null {
  if (image.beam !== null) return gaussianOfMoments(frame, beamMoments(image.beam));
  return coreGaussian(image.pixels, image.known, image.width, image.height);
}

/** The reading of the image that leaves least. */
export function readImageAs(image: SkyImage, atoms: Atoms, lobe: PixelGaussian): Reading {
  const { pixels, known, width, height } = image;
  const weightsOf = (weighting: Weighting) => imagingWeights(atoms, width, height, weighting);
  const clean = peel(pixels, known, width, height, gaussianPatch(lobe), RESTORED);
  let best: Reading = {
    deconvolved: true,
    weighting: WEIGHTINGS[0]!,
    weights: weightsOf(WEIGHTINGS[0]!),
    clusters: clustersOf(clean.components, lobe),
    rms: clean.rms,
  };
  for (const weighting of WEIGHTINGS) {
    const weights = weightsOf(weighting);
    const patch = dirtyPatch(atoms.cycles, weights, width, height);
    const dirty = peel(pixels, known, width, height, patch, DIRTY);
    if (dirty.rms >= best.rms * (best.deconvolved ? CLEARLY_LESS : 1)) continue;
    best = {
      deconvolved: false,
      weighting,
      weights,
      clusters: clustersOf(dirty.components, lobe),
      rms: dirty.rms,
    };
  }
  return best;
}

/** The dirty beam, as far out as the image is wide where that is not too much. */
function dirtyPatch(cycles: Frequencies, weights: Float64Array, width: number, height: number): Patch {
  const doubled = Math.max(width, height) <= LARGEST_DOUBLED;
  const halfX = doubled ? width : (width >> 1) - 1;
  const halfY = doubled ? height : (height >> 1) - 1;
  const transformer = new UvTransformer(2 * halfX + 1, 2 * halfY + 1);
  const values = new Float64Array((2 * halfX + 1) * (2 * halfY + 1));
  transformer.toImage(cycles, weights, new Float64Array(weights.length), null, values);
  return { halfX, halfY, values };
}
