/** Sources beyond the edge of the image: the data hold them, and their sidelobes reach into it. */
import type { Atoms } from "../samples/atoms.ts";
import { imageNoise } from "../uv/weighting.ts";
import { type Imager, isInside } from "./look.ts";
import type { Source, Visibilities } from "./model.ts";
import { agreed, restOf } from "./solve-sources.ts";

/** The field that is searched, in widths of the image. */
const WIDER = 3;
/** A source stands out by this many times the noise of the image, and the scatter of the wider one. */
const LEAST_SIGMAS = 10;
const LEAST_SCATTERS = 7;
const MOST_FOUND = 3;

/** @returns the sources with those outside the image after them; the same list where there are none */
export function withOutside(imager: Imager, sources: readonly Source[], beam: number): readonly Source[] {
  const { atoms, frame } = imager;
  let known = sources;
  for (let i = 0; i < MOST_FOUND; i++) {
    const found = brightestOutside(imager, known);
    if (found === null) break;
    const next = agreed([...known, found], atoms, frame.declination, beam).sources;
    if (next.length <= known.length) break;
    known = next;
  }
  return known;
}

function brightestOutside(imager: Imager, sources: readonly Source[]): Source | null {
  const { atoms, frame, transformer, weights } = imager;
  const rest = restOf(atoms, sources, frame.declination);
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
  let at = -1;
  let squares = 0;
  for (let i = 0; i < out.length; i++) {
    squares += out[i]! ** 2;
    const [x, y] = offsetOf(i, width, height);
    const beyond = Math.abs(x) > width / WIDER / 2 || Math.abs(y) > height / WIDER / 2;
    if (beyond && (at < 0 || out[i]! > out[at]!)) at = i;
  }
  const scatter = Math.sqrt(squares / out.length);
  const noise = imageNoise(atoms, weights) / used;
  if (at < 0 || !(out[at]! > LEAST_SIGMAS * noise && out[at]! > LEAST_SCATTERS * scatter)) return null;
  const [x, y] = offsetOf(at, width, height);
  const [a, b, c, d] = frame.matrix;
  const [l, m] = [frame.middle[0] + WIDER * (a * x + b * y), frame.middle[1] + WIDER * (c * x + d * y)];
  const source = sharpened({ flux: out[at]!, l, m, shape: [0, 0, 0] }, imager, rest);
  return Math.hypot(l, m) < 1 && !isInside(imager, source) ? source : null;
}

/** Steps of a search around a pixel of the wider field, to each side, and samples that take part. */
const STEPS = 5;
const MOST_SAMPLED = 20_000;

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

function offsetOf(at: number, width: number, height: number): [number, number] {
  return [(at % width) - (width >> 1), Math.floor(at / width) - (height >> 1)];
}

/** Weight of the samples that the larger pixels still sample. */
function usedWeight(cycles: Atoms["cycles"], weights: Float64Array): number {
  let sum = 0;
  for (let k = 0; k < weights.length; k++) {
    if (Math.abs(cycles.x[k]!) < 0.5 && Math.abs(cycles.y[k]!) < 0.5) sum += weights[k]!;
  }
  return sum;
}
