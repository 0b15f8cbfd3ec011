/**
 * What an imager leaves in the image that the samples themselves do not hold: phases of w, widths of channels and
 * integrations, emission that the shortest spacing does not see. Each is predicted from the sources and the samples,
 * and its size fitted to the image: 1 where the image has all of it, 0 where the imager corrected it.
 */
import { imageOf, isExtended, isInside, sidelobesOf } from "../sky/look.ts";
import { modelOf, type Physics, PLAIN, type Source, WHOLE } from "../sky/model.ts";
import { inner } from "../sky/residual.ts";
import type { Understanding } from "../sky/understand.ts";
import { type Evidence, excessOf } from "./evidence.ts";

export type ImagerFault =
  | "w-term"
  | "bandwidth-smearing"
  | "time-smearing"
  | "missing-short-spacings"
  | "outside-source";

export interface Predicted {
  readonly kind: ImagerFault;
  /** of the predicted pattern in the image, and how many of its errors that is */
  readonly amplitude: number;
  readonly sigmas: number;
  /** power of the image beyond noise that it explains */
  readonly share: number;
  /** largest height of the pattern at its fitted size, image unit */
  readonly height: number;
  /** what is left of the pattern once the heights and places of sources are free, image unit */
  readonly pattern: Float64Array;
}

const PHYSICS: readonly (readonly [ImagerFault, Physics])[] = [
  ["w-term", { ...PLAIN, w: true }],
  ["bandwidth-smearing", { ...PLAIN, bandwidth: true }],
  ["time-smearing", { ...PLAIN, time: true }],
];

/**
 * All that can be predicted, each fitted by itself to what the ones accepted before it leave: the one that explains
 * most first.
 *
 * @param residual the image without sources and without what samples at fault put into it
 * @param accepts  whether a fitted one is real
 */
export function predictImagerFaults(
  evidence: Evidence,
  residual: Float64Array,
  accepts: (predicted: Predicted) => boolean,
): { readonly accepted: Predicted[]; readonly others: Predicted[] } {
  const accepted: Predicted[] = [];
  let waiting = patternsOf(evidence.seen);
  let left = residual;
  for (;;) {
    const fitted = waiting.map(({ kind, pattern }) => fitPattern(evidence, kind, pattern, left));
    const good = fitted.filter(accepts).sort((a, b) => b.share - a.share);
    const best = good[0];
    if (best === undefined) return { accepted, others: fitted };
    accepted.push(best);
    left = left.map((value, i) => value - best.amplitude * best.pattern[i]!);
    const own = inner(best.pattern, best.pattern);
    waiting = waiting
      .filter(({ kind }) => kind !== best.kind)
      .map(({ kind, pattern }) => {
        // What two causes have in common is laid at the first.
        const common = inner(pattern, best.pattern) / own;
        return { kind, pattern: pattern.map((value, i) => value - common * best.pattern[i]!) };
      });
  }
}

interface Pattern {
  readonly kind: ImagerFault;
  readonly pattern: Float64Array;
}

function patternsOf(seen: Understanding): Pattern[] {
  if (!seen.held) return [];
  const { atoms, frame, projector } = seen;
  const sources = seen.sources.filter((source) => isInside(seen, source));
  const plain = modelOf(atoms, sources, PLAIN, frame.declination, false);
  const patterns: Pattern[] = PHYSICS.map(([kind, physics]) => {
    const model = modelOf(atoms, sources, physics, frame.declination, false);
    const re = model.re.map((x, k) => x - plain.re[k]!);
    const im = model.im.map((x, k) => x - plain.im[k]!);
    return { kind, pattern: projector.take(imageOf(seen, { re, im })).left };
  });
  const outside = seen.sources.filter((source) => !isInside(seen, source));
  if (outside.length > 0) {
    const image = imageOf(seen, modelOf(atoms, outside, WHOLE, frame.declination, false));
    patterns.push({ kind: "outside-source", pattern: projector.take(image).left });
  }
  const lost = missedSources(seen);
  if (lost.length > 0) {
    patterns.push({ kind: "missing-short-spacings", pattern: projector.take(sidelobesOf(seen, lost)).left });
  }
  return patterns;
}

/** Share of its flux that the shortest spacing misses, at least, for an extended source to be one that is missed. */
const LEAST_MISSED = 0.25;

function missedSources(seen: Understanding): Source[] {
  return seen.sources.filter(
    (source) => isExtended(source) && missedFraction(source, seen.sampling.shortest) > LEAST_MISSED,
  );
}

/** Of the flux of a Gaussian, at a spacing in wavelengths: 1 - exp(-2 pi^2 s^2 q^2), on the average over directions. */
export function missedFraction({ shape }: Source, spacing: number): number {
  return 1 - Math.exp(-2 * Math.PI ** 2 * ((shape[0] + shape[2]) / 2) * spacing * spacing);
}

function fitPattern(
  evidence: Evidence,
  kind: ImagerFault,
  pattern: Float64Array,
  residual: Float64Array,
): Predicted {
  const own = inner(pattern, pattern);
  const product = inner(residual, pattern);
  const amplitude = own > 0 ? product / own : 0;
  let height = 0;
  for (const value of pattern) height = Math.max(height, Math.abs(amplitude * value));
  return {
    kind,
    amplitude,
    sigmas: product / noiseOf(evidence, pattern),
    share: (amplitude * product) / excessOf(evidence),
    height,
    pattern,
  };
}

/** rms that the noise of the data gives the inner product of the image with a pattern. */
function noiseOf({ seen }: Evidence, pattern: Float64Array): number {
  const { atoms, transformer, weights } = seen;
  const spectrum = transformer.spectrum(pattern);
  const scale = seen.scale > 0 ? seen.scale : 1;
  let sum = 0;
  for (let k = 0; k < atoms.count; k++) {
    if (weights[k] === 0) continue;
    spectrum.read(atoms.cycles.x[k]!, atoms.cycles.y[k]!);
    sum += (weights[k]! ** 2 / atoms.weight[k]!) * (spectrum.re ** 2 + spectrum.im ** 2);
  }
  return scale * Math.sqrt(sum * atoms.noise);
}
