/** Emission larger than the compact sources account for, found in the data on the shortest spacings. */
import type { Atoms } from "../samples/atoms.ts";
import { type ImageFrame, skyOffset } from "../uv/frame.ts";
import type { UvTransformer } from "../uv/transformer.ts";
import { type DataFit, fitToData } from "./fit-data.ts";
import { modelOf, WHOLE } from "./model.ts";
import { widthsOf } from "./patch.ts";

/** Spacings that are looked at, in shortest ones. */
const REACH = 2.5;
/** Full widths that are tried, in units of one over the shortest spacing. */
const WIDTHS = [0.3, 0.5, 0.8, 1.1];
/** It accounts for this share of what the compact sources leave over the noise, at least: no fault looks like one. */
const LEAST_EXPLAINED = 0.4;
/** chi^2 that it takes away, at least. */
const LEAST_CHI = 200;
const SIGMA = 1 / Math.sqrt(8 * Math.LN2);

export interface ExtendedRequest {
  readonly atoms: Atoms;
  readonly frame: ImageFrame;
  readonly transformer: UvTransformer;
  /** full width, radians */
  readonly beam: number;
  /** wavelengths */
  readonly shortest: number;
  /** imaging weights */
  readonly weights: Float64Array;
}

/** @returns the compact sources with the extended one last, or null where there is none */
export function findExtended(compact: DataFit, request: ExtendedRequest): DataFit | null {
  const { atoms, frame, beam, shortest } = request;
  if (!(shortest > 0 && atoms.noise > 0)) return null;
  let all = 0;
  for (let k = 0; k < atoms.count; k++) {
    all += (atoms.weight[k]! * (atoms.re[k]! ** 2 + atoms.im[k]! ** 2)) / atoms.noise;
  }
  const excess = compact.left * all - 2 * atoms.count;
  if (!(excess > LEAST_CHI)) return null;
  const place = brightest(compact, request);
  if (place === null) return null;
  let best: DataFit | null = null;
  for (const width of WIDTHS) {
    const moment = ((width / shortest) * SIGMA) ** 2;
    if (width / shortest < 1.2 * beam) continue;
    const flux = place.height / Math.exp(-2 * Math.PI ** 2 * moment * (1.3 * shortest) ** 2);
    const start = [...compact.sources, { flux, l: place.l, m: place.m, shape: [moment, 0, moment] as const }];
    const fit = fitToData(start, { atoms, declination: frame.declination, beam: 2 * beam, rounds: 6 });
    if (best === null || fit.left < best.left) best = fit;
  }
  if (best === null) return null;
  const gone = (compact.left - best.left) * all;
  const found = best.sources.at(-1)!;
  const { minor } = widthsOf(found.shape);
  const real = found.flux > 0 && found.flux > 5 * best.errors.at(-1)! && minor > 1.3 * beam;
  return real && gone > LEAST_CHI && gone > LEAST_EXPLAINED * excess ? best : null;
}

/** Where the short spacings are brightest without the compact sources, and how bright a sample is there. */
function brightest(
  compact: DataFit,
  { atoms, frame, transformer, shortest, weights }: ExtendedRequest,
): { l: number; m: number; height: number } | null {
  const model = modelOf(atoms, compact.sources, WHOLE, frame.declination, true);
  const taper = weights.map((weight, k) => {
    const spacing = Math.hypot(atoms.u[k]!, atoms.v[k]!) / shortest;
    return weight * Math.exp(-((spacing / REACH) ** 2) * 2);
  });
  const sum = taper.reduce((total, weight) => total + weight, 0);
  if (!(sum > 0)) return null;
  const re = taper.map((weight, k) => (weight * (atoms.re[k]! - model.re[k]!)) / sum);
  const im = taper.map((weight, k) => (weight * (atoms.im[k]! - model.im[k]!)) / sum);
  const { width, height } = transformer;
  const image = new Float64Array(width * height);
  transformer.toImage(atoms.cycles, re, im, null, image);
  let at = 0;
  for (let i = 0; i < image.length; i++) if (image[i]! > image[at]!) at = i;
  if (!(image[at]! > 0)) return null;
  const [l, m] = skyOffset(frame, (at % width) - (width >> 1), Math.floor(at / width) - (height >> 1));
  return { l, m, height: image[at]! };
}
