/**
 * Whether a source is in all of the data alike: a ghost that some samples make is in those alone, and in the middle one
 * of the baselines, times or channels it is not there.
 */
import { MAD_TO_SIGMA } from "../../util/statistics.ts";
import type { Atoms } from "../samples/atoms.ts";
import { Response, type Source, type Visibilities, WHOLE } from "./model.ts";

/** Flux in the middle group over that of all, at least; and how many of its errors it may miss that by. */
const LEAST_SHARE = 0.6;
const SIGMAS = 3;
/** Error of a median over that of a mean. */
const MEDIAN_ERROR = 1.2533;
/** Times are taken together into so many stretches. */
const STRETCHES = 12;

/** @param rest data less all sources, this one included */
export function isConsistent(source: Source, rest: Visibilities, atoms: Atoms, declination: number): boolean {
  const baselines = atoms.baseline.reduce((most, one) => Math.max(most, one), 0) + 1;
  const stretches = Math.min(STRETCHES, atoms.bins.times);
  const groupings = [
    new Groups(baselines, (k) => atoms.baseline[k]!),
    new Groups(stretches, (k) => Math.floor((atoms.time[k]! * stretches) / atoms.bins.times)),
    new Groups(atoms.bins.channels, (k) => atoms.channel[k]!),
  ];
  const response = new Response(atoms, WHOLE, declination, true);
  let [all, total] = [0, 0];
  for (let k = 0; k < atoms.count; k++) {
    response.at(k, source);
    const { re, im } = response;
    const own = atoms.weight[k]! * (re * re + im * im);
    const product = atoms.weight[k]! * (re * rest.re[k]! + im * rest.im[k]!) + own * source.flux;
    all += product;
    total += own;
    for (const groups of groupings) groups.add(k, product, own);
  }
  if (!(total > 0)) return false;
  const flux = all / total;
  const error = Number.isFinite(atoms.noise) ? Math.sqrt(atoms.noise / total) : 0;
  return groupings.every((groups) => {
    const { middle, scatter } = groups.median();
    // What other sources, not known yet, put in scatters the groups: noise is not all.
    const least = LEAST_SHARE * flux - SIGMAS * MEDIAN_ERROR * Math.max(error, scatter);
    return !(middle < least);
  });
}

class Groups {
  private readonly product: Float64Array;
  private readonly own: Float64Array;
  private readonly of: (k: number) => number;

  constructor(count: number, of: (k: number) => number) {
    this.product = new Float64Array(count);
    this.own = new Float64Array(count);
    this.of = of;
  }

  add(k: number, product: number, own: number): void {
    const group = this.of(k);
    this.product[group]! += product;
    this.own[group]! += own;
  }

  /**
   * Of the fluxes of the groups, by their weight, and the scatter of a mean of them about it; NaN of fewer than three,
   * which tell nothing.
   */
  median(): { readonly middle: number; readonly scatter: number } {
    const fluxes: { value: number; own: number }[] = [];
    this.product.forEach((product, i) => {
      const own = this.own[i]!;
      if (own > 0) fluxes.push({ value: product / own, own });
    });
    if (fluxes.length < 3) return { middle: Number.NaN, scatter: 0 };
    const middle = weightedMedian(fluxes);
    const off = fluxes.map(({ value, own }) => ({ value: Math.abs(value - middle), own }));
    return { middle, scatter: (MAD_TO_SIGMA * weightedMedian(off)) / Math.sqrt(fluxes.length) };
  }
}

function weightedMedian(values: { value: number; own: number }[]): number {
  values.sort((a, b) => a.value - b.value);
  const half = values.reduce((sum, { own }) => sum + own, 0) / 2;
  let sum = 0;
  for (const { value, own } of values) {
    sum += own;
    if (sum >= half) return value;
  }
  return Number.NaN;
}
