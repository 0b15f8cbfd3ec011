/**
 * Whether a source is in all of the data alike: a ghost that some samples make is in those alone, and in the middle one
 * of the baselines, times or channels it is not there.
 */
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
  const least = LEAST_SHARE * flux - SIGMAS * MEDIAN_ERROR * error;
  return groupings.every((groups) => !(groups.median() < least));
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

  /** Of the fluxes of the groups, by their weight; NaN of one group, which tells nothing. */
  median(): number {
    const fluxes: { flux: number; own: number }[] = [];
    this.product.forEach((product, i) => {
      const own = this.own[i]!;
      if (own > 0) fluxes.push({ flux: product / own, own });
    });
    if (fluxes.length < 3) return Number.NaN;
    fluxes.sort((a, b) => a.flux - b.flux);
    const half = fluxes.reduce((sum, { own }) => sum + own, 0) / 2;
    let sum = 0;
    for (const { flux, own } of fluxes) {
      sum += own;
      if (sum >= half) return flux;
    }
    return Number.NaN;
  }
}
