/**
 * What of an image are sources, what is their response, and what is left. Sources are found in the image, refined on
 * the visibilities, and taken out of both: whatever is wrong is in the rest.
 */
import type { Weighting } from "../../dataset/plan-request.ts";
import type { Sampling } from "../../imaging/sampling.ts";
import { InputError } from "../../util/errors.ts";
import type { SkyImage } from "../image/sky-image.ts";
import type { Atoms } from "../samples/atoms.ts";
import { type ImageFrame, skyOffset } from "../uv/frame.ts";
import { UvTransformer } from "../uv/transformer.ts";
import { imageNoise } from "../uv/weighting.ts";
import type { Cluster } from "./clusters.ts";
import { findExtended } from "./extended.ts";
import { type Imager, isExtended, nuisanceOf } from "./look.ts";
import type { Source, Visibilities } from "./model.ts";
import { beamMoments, gaussianOfMoments, momentsOfGaussian, type PixelGaussian, widthsOf } from "./patch.ts";
import { mainLobe, readImageAs } from "./patches.ts";
import { Projector } from "./residual.ts";
import { completedFit, MOST_SOURCES } from "./search.ts";
import { agreed, restOf, type Solved, solveSources } from "./solve-sources.ts";

export interface Understanding extends Imager {
  readonly sampling: Sampling;
  /** of the main lobe, radians and from north through east */
  readonly beam: { readonly major: number; readonly minor: number; readonly angle: number };
  readonly deconvolved: boolean;
  readonly weighting: Weighting;
  /** as the data hold them; an extended one, found in the data, last */
  readonly sources: readonly Source[];
  /** false: the data do not hold the sources of the image, so nothing is told from their values */
  readonly held: boolean;
  /** image flux over data flux; NaN where the data do not hold the sources */
  readonly scale: number;
  /** (atoms) data less the sources, dataset unit */
  readonly rest: Visibilities;
  /** takes the sources, and what their place and height may be off by, out of an image */
  readonly projector: Projector;
  /** the image without its sources */
  readonly residual: Float64Array;
  /** share of the dirty beam's sidelobes of its sources that the image still has; 0 deconvolved, 1 dirty */
  readonly sidelobes: number;
  /** rms that the noise of the data makes in the image; NaN unknown */
  readonly noise: number;
}

/** @param trusted (atoms) 1 where a sample may tell of the sources; null: all of them */
export function understand(
  image: SkyImage,
  sampling: Sampling,
  frame: ImageFrame,
  gathered: Atoms,
  trusted: Uint8Array | null = null,
): Understanding {
  if (gathered.count === 0) {
    throw new InputError(
      "no usable sample of the dataset is of the field and frequencies of this image",
      { file: image.file },
      "Name the dataset that the image was made from",
    );
  }
  const transformer = new UvTransformer(image.width, image.height);
  const lobe = mainLobe(image, frame) ?? roundLobe(sampling, frame);
  const beam = image.beam ?? widthsOf(momentsOfGaussian(frame, lobe));
  const reading = readImageAs(image, gathered, lobe);
  const found = reading.clusters
    .filter(({ flux }) => flux > 0)
    .slice(0, MOST_SOURCES)
    .map((cluster) => sourceOf(cluster, image, frame));
  const only = (values: Float64Array) => values.map((value, k) => (trusted?.[k] === 0 ? 0 : value));
  const solving = { ...gathered, weight: only(gathered.weight) };
  const solved = solveSources(found, solving, frame.declination, beam.major);
  const first = { image, frame, transformer, atoms: solved.atoms, lobe, weights: only(reading.weights) };
  const sources = solved.held ? completed(first, solved, beam.major, sampling.shortest) : found;
  const all = { ...solved.atoms, weight: gathered.weight };
  const rest = solved.held ? restOf(all, sources, frame.declination) : { re: all.re, im: all.im };
  const atoms = solved.held ? withLeastNoise(all, rest) : all;
  const imager = { ...first, atoms, weights: reading.weights };
  return {
    ...imager,
    sampling,
    beam,
    deconvolved: reading.deconvolved,
    weighting: reading.weighting,
    held: solved.held,
    rest,
    noise: imageNoise(atoms, reading.weights),
    ...withoutSources(imager, sources, solved.held),
  };
}

/** weight x |V|^2 over twice the noise is exponentially distributed: a quarter of it lies below this. */
const EXPONENTIAL_QUARTER = -Math.log(0.75);
const MOST_SAMPLED = 50_000;

/**
 * The noise that the quieter samples show without the sources, where that is less: interference in one channel is in
 * the differences with its neighbours, too.
 */
function withLeastNoise(atoms: Atoms, rest: Visibilities): Atoms {
  const step = Math.max(1, Math.floor(atoms.count / MOST_SAMPLED));
  const powers: number[] = [];
  for (let k = 0; k < atoms.count; k += step) {
    powers.push(atoms.weight[k]! * (rest.re[k]! ** 2 + rest.im[k]! ** 2));
  }
  powers.sort((a, b) => a - b);
  const quarter = powers[powers.length >> 2] ?? Number.NaN;
  const shown = quarter / EXPONENTIAL_QUARTER / 2;
  if (!(shown > 0)) return atoms;
  return { ...atoms, noise: atoms.noise > 0 ? Math.min(atoms.noise, shown) : shown };
}

type Without = Pick<Understanding, "sources" | "projector" | "residual" | "sidelobes" | "scale">;

function withoutSources(imager: Imager, sources: readonly Source[], held: boolean): Without {
  const { image } = imager;
  const { templates, heightAt, sidelobesAt } = nuisanceOf(imager, sources);
  const projector = new Projector(templates, image.known, image.width, image.height);
  const { coefficients, left } = projector.take(image.pixels);
  const ratios = sources.flatMap((source, i) =>
    isExtended(source) || heightAt[i] === -1 ? [] : [coefficients[heightAt[i]!]! / source.flux],
  );
  ratios.sort((a, b) => a - b);
  return {
    sources,
    projector,
    residual: left,
    sidelobes: sidelobesAt < 0 ? 0 : coefficients[sidelobesAt]!,
    scale: held ? (ratios[ratios.length >> 1] ?? 1) : Number.NaN,
  };
}

/** With the sources that the image hid, and with the extended emission. */
function completed(imager: Imager, solved: Solved, beam: number, shortest: number): readonly Source[] {
  const points = completedFit(imager, solved.fit, beam);
  const extended = findExtended(points, { ...imager, beam, shortest });
  if (extended === null) return points.sources;
  // With it in the model, some of what looked like points is gone, and others show.
  const again = agreed(extended.sources, imager.atoms, imager.frame.declination, beam);
  return completedFit(imager, again, beam).sources;
}

/** Where neither header nor image shows a beam: the resolution of the longest spacing. */
function roundLobe(sampling: Sampling, frame: ImageFrame): PixelGaussian {
  const width = 0.7 / sampling.longest;
  return gaussianOfMoments(frame, beamMoments({ major: width, minor: width, angle: 0 }));
}

function sourceOf({ flux, x, y, moments, extended }: Cluster, image: SkyImage, frame: ImageFrame): Source {
  const [l, m] = skyOffset(frame, x - (image.width >> 1), y - (image.height >> 1));
  const [a, b, c, d] = frame.matrix;
  const [xx, xy, yy] = moments;
  const shape = [
    a * a * xx + 2 * a * b * xy + b * b * yy,
    a * c * xx + (a * d + b * c) * xy + b * d * yy,
    c * c * xx + 2 * c * d * xy + d * d * yy,
  ] as const;
  return { flux, l, m, shape: extended ? shape : [0, 0, 0] };
}
