/**
 * Sources that the data hold besides those known: the brightest place of a field wider than the image, one after the
 * other. Those outside the image are found as well: their sidelobes reach into it.
 */
import type { Atoms } from "../samples/atoms.ts";
import { imageNoise } from "../uv/weighting.ts";
import type { DataFit } from "./fit-data.ts";
import type { Imager } from "./look.ts";
import type { Source, Visibilities } from "./model.ts";
import { robustRms } from "./peel.ts";
import { agreed, restOf } from "./solve-sources.ts";

/** The field that is searched, in widths of the image. */
const WIDER = 3;
/** A place is tried as a source this many times above the noise of the image, above the scatter, above the lowest. */
const LEAST_SIGMAS = 7;
const LEAST_SCATTERS = 5;
const BALANCE = 1.2;
/** Sources that take part, at most. */
export const MOST_SOURCES = 16;
/** A source takes away this share of the power that is left, at least. */
const LEAST_GONE = 2e-4;

/** The fit with the sources that it lacks; the extended ones stay last. */
export function completedFit(imager: Imager, first: DataFit, beam: number): DataFit {
  const { atoms, frame } = imager;
  let fit = first;
  while (fit.sources.length < MOST_SOURCES) {
    const found = brightest(imager, restOf(atoms, fit.sources, frame.declination));
    if (found === null) break;
    const next = agreed([found, ...fit.sources], atoms, frame.declination, beam);
    // One that only takes the place of another, and no better, leads nowhere.
    if (!(next.left < (1 - LEAST_GONE) * fit.left)) break;
    fit = next;
  }
  return fit;
}

function brightest(imager: Imager, rest: Visibilities): Source | null {
  const { atoms, frame, transformer, weights } = imager;
  const { width, height } = transformer;
  const out = new Float64Array(width * height);
  // Pixels three times as large: the same transform sees a field three times as wide.
  const cycles = {
    x: atoms.cycles.x.map((value) => value * WIDER),
    y: atoms.cycles.y.map((value) => value * WIDER),
  };
  const used = usedWeight(cycles, weights);
  if (!(used > 0)) return null;
  transformer.toImage(
    cycles,
    rest.re.map((value, k) => (value * weights[k]!) / used),
    rest.im.map((value, k) => (value * weights[k]!) / used),
    null,
    out,
  );
  let at = 0;
  let low = 0;
  for (let i = 0; i < out.length; i++) {
    if (out[i]! > out[at]!) at = i;
    low = Math.min(low, out[i]!);
  }
  const noise = imageNoise(atoms, weights) / used;
  const scatter = robustRms(out, new Uint8Array(out.length).fill(1));
  const floor = Math.max(LEAST_SIGMAS * noise || 0, LEAST_SCATTERS * scatter, -BALANCE * low);
  if (!(out[at]! > floor)) return null;
  const [x, y] = [(at % width) - (width >> 1), Math.floor(at / width) - (height >> 1)];
  const [a, b, c, d] = frame.matrix;
  const [l, m] = [frame.middle[0] + WIDER * (a * x + b * y), frame.middle[1] + WIDER * (c * x + d * y)];
  if (!(Math.hypot(l, m) < 0.9)) return null;
  return sharpened({ flux: out[at]!, l, m, shape: [0, 0, 0] }, imager, rest);
}

/** Weight of the samples that the larger pixels still sample. */
function usedWeight(cycles: Atoms["cycles"], weights: Float64Array): number {
  let sum = 0;
  for (let k = 0; k < weights.length; k++) {
    if (Math.abs(cycles.x[k]!) < 0.5 && Math.abs(cycles.y[k]!) < 0.5) sum += weights[k]!;
  }
  return sum;
}

/** Steps of a search around a pixel of the wider field, to each side, and samples that take part. */
const STEPS = 4;
const MOST_SAMPLED = 8_000;

/** A pixel of the wider field is as large as a beam: the brightest place near it, by direct sum. */
function sharpened(source: Source, { atoms, weights, frame }: Imager, rest: Visibilities): Source {
  const reach = WIDER * frame.cell;
  const stride = Math.max(1, Math.floor(atoms.count / MOST_SAMPLED));
  let best = { ...source, flux: Number.NEGATIVE_INFINITY };
  for (let i = -STEPS; i <= STEPS; i++) {
    for (let j = -STEPS; j <= STEPS; j++) {
      const [l, m] = [source.l + (i / STEPS) * reach, source.m + (j / STEPS) * reach];
      const rr = l * l + m * m;
      const nMinus1 = -rr / (1 + Math.sqrt(Math.max(0, 1 - rr)));
      let [sum, total] = [0, 0];
      for (let k = 0; k < atoms.count; k += stride) {
        const phase = 2 * Math.PI * (atoms.u[k]! * l + atoms.v[k]! * m + atoms.w[k]! * nMinus1);
        sum += weights[k]! * (rest.re[k]! * Math.cos(phase) - rest.im[k]! * Math.sin(phase));
        total += weights[k]!;
      }
      if (sum / total > best.flux) best = { ...source, l, m, flux: sum / total };
    }
  }
  return best;
}
