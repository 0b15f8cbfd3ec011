/**
 * The sources of an image refined on the visibilities themselves: flux, place, and the shape of extended ones. What w,
 * channels and integrations do to them is in the model, so that it does not pass for something else.
 */
import { cholesky, solveCholesky } from "../linear.ts";
import type { Atoms } from "../samples/atoms.ts";
import { Response, type Source, WHOLE } from "./model.ts";

export interface DataFit {
  readonly sources: readonly Source[];
  /** (sources) 1 sigma, dataset unit */
  readonly errors: Float64Array;
  /** share of the power of the data that the sources leave, noise included */
  readonly left: number;
}

export interface FitRequest {
  readonly atoms: Atoms;
  readonly declination: number;
  /** full width of the beam, radians: a source moves by less than this share of it a step */
  readonly beam: number;
  readonly rounds: number;
}

/** Atoms that are fitted, at most, on the way and in the end: every so many of more. */
const MOST_ON_THE_WAY = 6_000;
const MOST_IN_THE_END = 30_000;
const LARGEST_STEP = 0.4;
/** Atoms further off than this many times the typical one are passed over. */
const OUTLYING = 6;

/** Sources keep their order. Extended are those whose shape is not 0. */
export function fitToData(start: readonly Source[], request: FitRequest): DataFit {
  const { atoms } = request;
  let sources = start;
  let errors: Float64Array = new Float64Array(start.length).fill(Number.NaN);
  let limit = Number.POSITIVE_INFINITY;
  // The fluxes first: places are only as good as the flux that they are weighed with.
  for (let round = 0; round <= request.rounds; round++) {
    const parameters = parametersOf(sources, round > 0);
    const stride = strideOf(atoms, round === request.rounds ? MOST_IN_THE_END : MOST_ON_THE_WAY);
    const step = solveStep(sources, parameters, request, stride, limit);
    sources = moved(sources, parameters, step.values, request.beam);
    errors = fluxErrors(parameters, step.errors, sources.length);
    limit = step.typical > 0 ? step.typical * OUTLYING ** 2 : Number.POSITIVE_INFINITY;
  }
  return { sources, errors, left: powerLeft(sources, request, strideOf(atoms, MOST_IN_THE_END)) };
}

/** A prime that does not divide the channels: no channel and no time is favoured. */
function strideOf({ count, bins }: Atoms, most: number): number {
  let stride = Math.ceil(count / most);
  if (stride <= 1) return 1;
  while (!isPrime(stride) || bins.channels % stride === 0) stride += 1;
  return stride;
}

function isPrime(value: number): boolean {
  for (let factor = 2; factor * factor <= value; factor++) if (value % factor === 0) return false;
  return true;
}

type Kind = "flux" | "l" | "m" | "ll" | "lm" | "mm";

interface Parameter {
  readonly source: number;
  readonly kind: Kind;
}

function parametersOf(sources: readonly Source[], places: boolean): Parameter[] {
  return sources.flatMap(({ shape }, source) => {
    const extended = shape[0] !== 0 || shape[2] !== 0;
    const kinds: Kind[] = !places
      ? ["flux"]
      : extended
        ? ["flux", "l", "m", "ll", "lm", "mm"]
        : ["flux", "l", "m"];
    return kinds.map((kind) => ({ source, kind }));
  });
}

interface Step {
  readonly values: Float64Array;
  /** from the noise alone */
  readonly errors: Float64Array;
  /** median of weight x |residual|^2 */
  readonly typical: number;
}

function solveStep(
  sources: readonly Source[],
  parameters: readonly Parameter[],
  { atoms, declination }: FitRequest,
  stride: number,
  limit: number,
): Step {
  const n = parameters.length;
  const matrix = new Float64Array(n * n);
  const right = new Float64Array(n);
  const [rowRe, rowIm] = [new Float64Array(n), new Float64Array(n)];
  const response = new Response(atoms, WHOLE, declination, true);
  const sizes: number[] = [];
  for (let k = 0; k < atoms.count; k += stride) {
    let re = atoms.re[k]!;
    let im = atoms.im[k]!;
    let at = 0;
    for (let s = 0; s < sources.length; s++) {
      const source = sources[s]!;
      response.at(k, source);
      re -= source.flux * response.re;
      im -= source.flux * response.im;
      while (at < n && parameters[at]!.source === s) {
        const { kind } = parameters[at]!;
        fillRow(kind, source.flux, atoms.u[k]!, atoms.v[k]!, response.re, response.im, rowRe, rowIm, at);
        at += 1;
      }
    }
    const weight = atoms.weight[k]!;
    if (weight === 0) continue;
    const size = weight * (re * re + im * im);
    sizes.push(size);
    if (size > limit) continue;
    for (let i = 0; i < n; i++) {
      const wRe = weight * rowRe[i]!;
      const wIm = weight * rowIm[i]!;
      right[i]! += wRe * re + wIm * im;
      for (let j = 0; j <= i; j++) matrix[i * n + j]! += wRe * rowRe[j]! + wIm * rowIm[j]!;
    }
  }
  for (let i = 0; i < n; i++) for (let j = 0; j < i; j++) matrix[j * n + i] = matrix[i * n + j]!;
  const errors = Float64Array.from({ length: n }, (_, i) =>
    Math.sqrt(atoms.noise / matrix[i * n + i]! / stride),
  );
  sizes.sort((a, b) => a - b);
  return {
    values: solveCholesky(cholesky(matrix, n), right),
    errors,
    typical: sizes[sizes.length >> 1] ?? 0,
  };
}

/** Derivative of the model by a parameter, into place `at`: by place -2 pi i u times it, by shape a real factor. */
function fillRow(
  kind: Kind,
  flux: number,
  u: number,
  v: number,
  re: number,
  im: number,
  rowRe: Float64Array,
  rowIm: Float64Array,
  at: number,
): void {
  if (kind === "l" || kind === "m") {
    const turn = 2 * Math.PI * flux * (kind === "l" ? u : v);
    rowRe[at] = turn * im;
    rowIm[at] = -turn * re;
    return;
  }
  const shrink = -2 * Math.PI ** 2 * flux;
  let factor = 1;
  if (kind === "ll") factor = shrink * u * u;
  else if (kind === "lm") factor = shrink * 2 * u * v;
  else if (kind === "mm") factor = shrink * v * v;
  rowRe[at] = factor * re;
  rowIm[at] = factor * im;
}

function moved(
  sources: readonly Source[],
  parameters: readonly Parameter[],
  values: Float64Array,
  beam: number,
): Source[] {
  const most = LARGEST_STEP * beam;
  const place = (step: number) => Math.max(-most, Math.min(most, step));
  return sources.map((source, s) => {
    const step = { flux: 0, l: 0, m: 0, ll: 0, lm: 0, mm: 0 };
    parameters.forEach(({ source: of, kind }, i) => {
      if (of === s) step[kind] = values[i]!;
    });
    const [ll, lm, mm] = source.shape;
    const extended = ll !== 0 || mm !== 0;
    // Sizes at most double or halve in a step, and stay sizes.
    const size = (old: number, by: number) => Math.max(old / 2, Math.min(2 * old, old + by));
    const [newLl, newMm] = extended ? [size(ll, step.ll), size(mm, step.mm)] : [0, 0];
    const cross = Math.sqrt(newLl * newMm) * 0.98;
    return {
      flux: source.flux + step.flux,
      l: source.l + place(step.l),
      m: source.m + place(step.m),
      shape: [newLl, extended ? Math.max(-cross, Math.min(cross, lm + step.lm)) : 0, newMm] as const,
    };
  });
}

function fluxErrors(parameters: readonly Parameter[], errors: Float64Array, sources: number): Float64Array {
  const out = new Float64Array(sources);
  parameters.forEach(({ source, kind }, i) => {
    if (kind === "flux") out[source] = errors[i]!;
  });
  return out;
}

function powerLeft(sources: readonly Source[], { atoms, declination }: FitRequest, stride: number): number {
  const response = new Response(atoms, WHOLE, declination, true);
  let [left, all] = [0, 0];
  for (let k = 0; k < atoms.count; k += stride) {
    let re = atoms.re[k]!;
    let im = atoms.im[k]!;
    all += atoms.weight[k]! * (re * re + im * im);
    for (const source of sources) {
      response.at(k, source);
      re -= source.flux * response.re;
      im -= source.flux * response.im;
    }
    left += atoms.weight[k]! * (re * re + im * im);
  }
  return all > 0 ? left / all : Number.NaN;
}
