/**
 * The peak that a point source at the field's edge keeps in an image made without a w correction. The phases that w
 * leaves are partly a gradient over the uv plane, which only displaces the source; the rest takes from its peak. So
 * the peak is looked for near the source's true place.
 */

import { fitPlane } from "../geometry/plane.ts";
import { planeDepth } from "../geometry/w-term.ts";
import type { EdgeSamples } from "./edge-samples.ts";

export interface WLoss {
  /** peak lost, of 1; at most a little over 1 */
  readonly loss: number;
  /** displacement of the peak, radians east and north: the same wherever on the edge the source is */
  readonly east: number;
  readonly north: number;
}

/** Samples used to look for the peak; the last value is over all. */
const SEARCH_SAMPLES = 8000;

/** NaN where no sample has a known w. */
export function wLossAt(samples: EdgeSamples, radius: number): WLoss {
  const depth = planeDepth(radius);
  const all = new PeakSum(samples, depth, 1);
  if (!(all.total > 0)) return { loss: Number.NaN, east: Number.NaN, north: Number.NaN };
  const stride = Math.max(1, Math.ceil(samples.count / SEARCH_SAMPLES));
  const few = stride === 1 ? all : new PeakSum(samples, depth, stride);
  const plane = fitPlane(samples.u, samples.v, zeroed(samples.w), known(samples));
  const starts: [number, number][] = [
    [0, 0],
    [-plane.a * depth, -plane.b * depth],
    ...few.partPlanes(6).map(([a, b]): [number, number] => [-a * depth, -b * depth]),
  ];
  let best: [number, number] = [0, 0];
  let value = Number.NEGATIVE_INFINITY;
  for (const start of starts) {
    const [place, height] = climb(few, start);
    if (height > value) [best, value] = [place, height];
  }
  const [place, height] = stride === 1 ? [best, value] : climb(all, best);
  return { loss: 1 - height, east: place[0], north: place[1] };
}

function known(samples: EdgeSamples): Float64Array {
  return samples.weight.map((weight, i) => (Number.isFinite(samples.w[i]!) ? weight : 0));
}

function zeroed(values: Float64Array): Float64Array {
  return values.map((value) => (Number.isFinite(value) ? value : 0));
}

/** The image near the source: sum of T cos(w phase - 2 pi (u dl + v dm)) / sum T. */
class PeakSum {
  private readonly u: Float64Array;
  private readonly v: Float64Array;
  private readonly w: Float64Array;
  private readonly weight: Float64Array;
  private readonly depth: number;
  readonly total: number;

  constructor(samples: EdgeSamples, depth: number, stride: number) {
    const places: number[] = [];
    for (let i = 0; i < samples.count; i += stride) if (Number.isFinite(samples.w[i]!)) places.push(i);
    const pick = (column: Float64Array) => Float64Array.from(places, (i) => column[i]!);
    this.u = pick(samples.u);
    this.v = pick(samples.v);
    this.w = pick(samples.w);
    this.weight = pick(samples.weight);
    this.depth = depth;
    this.total = this.weight.reduce((sum, weight) => sum + weight, 0);
  }

  /** Value, gradient and second derivatives at a displacement. */
  at(dl: number, dm: number): { value: number; gl: number; gm: number; ll: number; lm: number; mm: number } {
    const { u, v, w, weight, depth, total } = this;
    let [value, gl, gm, ll, lm, mm] = [0, 0, 0, 0, 0, 0];
    for (let i = 0; i < u.length; i++) {
      const phase = 2 * Math.PI * (w[i]! * depth + u[i]! * dl + v[i]! * dm);
      const cosine = weight[i]! * Math.cos(phase);
      const sine = weight[i]! * Math.sin(phase);
      value += cosine;
      gl -= u[i]! * sine;
      gm -= v[i]! * sine;
      ll -= u[i]! * u[i]! * cosine;
      lm -= u[i]! * v[i]! * cosine;
      mm -= v[i]! * v[i]! * cosine;
    }
    const turn = 2 * Math.PI;
    return {
      value: value / total,
      gl: (turn * gl) / total,
      gm: (turn * gm) / total,
      ll: (turn * turn * ll) / total,
      lm: (turn * turn * lm) / total,
      mm: (turn * turn * mm) / total,
    };
  }

  /** Largest step that stays within a main lobe: a quarter of the fringe of the rms spacing. */
  get reach(): number {
    let squares = 0;
    for (let i = 0; i < this.u.length; i++) squares += this.weight[i]! * (this.u[i]! ** 2 + this.v[i]! ** 2);
    return 0.25 / Math.sqrt(squares / this.total);
  }

  /** Planes of as many consecutive parts of the samples: what single tracks would displace. */
  partPlanes(parts: number): [number, number][] {
    return Array.from({ length: parts }, (_, part) => {
      const from = Math.floor((part * this.u.length) / parts);
      const to = Math.floor(((part + 1) * this.u.length) / parts);
      const { a, b } = fitPlane(
        this.u.subarray(from, to),
        this.v.subarray(from, to),
        this.w.subarray(from, to),
        this.weight.subarray(from, to),
      );
      return [a, b];
    });
  }
}

/** Newton steps where the image curves downwards, else up the gradient; never downhill. */
function climb(sum: PeakSum, start: readonly [number, number]): [[number, number], number] {
  let [dl, dm] = start;
  let here = sum.at(dl, dm);
  const { reach } = sum;
  for (let step = 0; step < 25; step++) {
    const determinant = here.ll * here.mm - here.lm * here.lm;
    let sl = (-here.gl * here.mm + here.gm * here.lm) / determinant;
    let sm = (here.gl * here.lm - here.gm * here.ll) / determinant;
    const slope = Math.hypot(here.gl, here.gm);
    if (slope === 0) break;
    if (!(here.ll < 0 && determinant > 0)) {
      sl = (here.gl / slope) * reach;
      sm = (here.gm / slope) * reach;
    }
    const shorten = Math.min(1, reach / Math.hypot(sl, sm));
    let [tl, tm] = [sl * shorten, sm * shorten];
    let next = sum.at(dl + tl, dm + tm);
    for (let half = 0; half < 6 && next.value < here.value; half++) {
      tl /= 2;
      tm /= 2;
      next = sum.at(dl + tl, dm + tm);
    }
    if (!(next.value > here.value)) break;
    dl += tl;
    dm += tm;
    const gain = next.value - here.value;
    here = next;
    if (gain < 1e-7) break;
  }
  return [[dl, dm], here.value];
}
