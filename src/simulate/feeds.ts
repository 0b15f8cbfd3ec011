/** What a pair of feeds makes of the Stokes parameters of the sky, leakage included. */
import type { RowState } from "./faults/effect.ts";
import type { LeakageTable } from "./gains.ts";
import type { Observation } from "./observation.ts";
import { isCircular, type Product } from "./products.ts";
import type { Sky } from "./sky.ts";

/** (channels) from `at` on; valid until the next is asked for. */
export interface ModelView {
  readonly real: Float64Array;
  readonly imag: Float64Array;
  readonly at: number;
}

/**
 * Feeds keep their orientation on the sky (the parallactic angle is taken out). Circular: RR = I + V, LL = I - V,
 * RL = Q + iU, LR = Q - iU; linear: XX = I + Q, YY = I - Q, XY = U + iV, YX = U - iV
 * (Hamaker & Bregman 1996, A&AS 117, 161).
 */
export class FeedModel {
  private readonly observation: Observation;
  private readonly sky: Sky;
  private readonly circular: boolean;
  private readonly leakage: LeakageTable | null;
  private readonly view: { real: Float64Array; imag: Float64Array; at: number };
  private readonly real: Float64Array;
  private readonly imag: Float64Array;

  constructor(observation: Observation, leakage: LeakageTable | null, sky: Sky) {
    this.observation = observation;
    this.sky = sky;
    this.circular = isCircular(observation.polarizations);
    this.leakage = leakage;
    this.real = new Float64Array(observation.channels);
    this.imag = new Float64Array(observation.channels);
    this.view = { real: this.real, imag: this.imag, at: 0 };
  }

  /** The model of one product of the row, in its sky's Stokes arrays or in a buffer of this object. */
  product(product: Product, row: RowState): ModelView {
    const { sky, view, observation } = this;
    const { stokes } = product;
    const hand1 = row.exchanged1 ? 1 - product.hand1 : product.hand1;
    const hand2 = row.exchanged2 ? 1 - product.hand2 : product.hand2;
    const own = row.station1 === row.station2 && hand1 === hand2 && (stokes ?? 0) === 0;
    const plain = !sky.polarized && this.leakage === null && !own;
    if (plain && (stokes === 0 || (stokes === null && hand1 === hand2))) {
      view.real = sky.real;
      view.imag = sky.imag;
      view.at = 0;
      return view;
    }
    view.real = this.real.fill(0);
    view.imag = this.imag.fill(0);
    view.at = 0;
    if (stokes !== null) {
      if (stokes === 0 || sky.polarized) this.addStokes(stokes, 1, 0);
    } else {
      this.addFeeds(hand1, hand2, 1, 0);
      if (this.leakage !== null) this.addLeakage(hand1, hand2, row);
    }
    // With itself an antenna sees its own noise power besides the sky's.
    if (own) {
      const { sefd } = observation.stations[row.station1]!;
      for (let c = 0; c < observation.channels; c++) this.real[c]! += sefd;
    }
    return view;
  }

  private addStokes(stokes: number, re: number, im: number): void {
    const { channels } = this.observation;
    const { sky, real, imag } = this;
    for (let c = 0, i = stokes * channels; c < channels; c++, i++) {
      real[c]! += sky.real[i]! * re - sky.imag[i]! * im;
      imag[c]! += sky.real[i]! * im + sky.imag[i]! * re;
    }
  }

  /** Add (re + i im) times the product of two perfect feeds. */
  private addFeeds(hand1: number, hand2: number, re: number, im: number): void {
    const { polarized } = this.sky;
    const sense = hand1 === 0 ? 1 : -1;
    if (hand1 === hand2) {
      this.addStokes(0, re, im);
      if (polarized) this.addStokes(this.circular ? 3 : 1, sense * re, sense * im);
    } else if (polarized) {
      const [even, odd] = this.circular ? [1, 2] : [2, 3];
      this.addStokes(even!, re, im);
      // times +-i
      this.addStokes(odd!, -sense * im, sense * re);
    }
  }

  /** First antenna's leakage d1, second's conj(d2), and their product. */
  private addLeakage(hand1: number, hand2: number, row: RowState): void {
    const { real, imag } = this.leakage!;
    const i = row.station1 * 2 + hand1;
    const j = row.station2 * 2 + hand2;
    const [ar, ai] = [real[i]!, imag[i]!];
    const [br, bi] = [real[j]!, -imag[j]!];
    this.addFeeds(1 - hand1, hand2, ar, ai);
    this.addFeeds(hand1, 1 - hand2, br, bi);
    this.addFeeds(1 - hand1, 1 - hand2, ar * br - ai * bi, ar * bi + ai * br);
  }
}
