/**
 * Visibilities of the invented sky: V = sum of I(nu) exp(-2 pi i nu (u l + v m + w (n - 1))), u, v, w in seconds, dimmed
 * by channel width and integration time, and for Gaussians by their size.
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., Eq. 3.7
 */

import { EARTH_ROTATION_RATE } from "../geometry/sidereal.ts";
import { SECONDS_PER_DAY } from "../util/constants.ts";
import type { Observation } from "./observation.ts";
import { isCircular } from "./products.ts";
import type { Source } from "./scenario.ts";

/** FWHM of exp(-4 ln 2 x^2) is 1. */
const FOUR_LN_2 = 4 * Math.LN2;

interface Component {
  readonly l: number;
  readonly m: number;
  readonly nMinus1: number;
  /** (channels) Jy */
  readonly flux: Float64Array;
  /** radians along and across the major axis; 0, 0 for a point */
  readonly major: number;
  readonly minor: number;
  readonly sinAngle: number;
  readonly cosAngle: number;
  readonly stokes: readonly [1, number, number, number];
  readonly transit: { readonly at: number; readonly width: number } | null;
}

/** Where a row looks from: seconds of light travel. */
export interface RowGeometry {
  u: number;
  v: number;
  w: number;
  /** true w less the w whose delay the correlator took out */
  untracked: number;
}

/** Which products hold a signal; the samples of the others are noise alone. */
export function productsWithSignal({ scenario, products }: Observation): boolean[] {
  const { sky } = scenario;
  const circular = isCircular(scenario.polarizations);
  const any = (use: (source: Source) => readonly number[]) =>
    sky.some((source) => use(source).some((part) => part !== 0));
  return products.map(({ stokes, hand1, hand2 }) => {
    if (sky.length === 0) return false;
    if (stokes !== null) return stokes === 0 || any(({ q, u, v }) => [[0, q, u, v][stokes]!]);
    if (hand1 === hand2 || scenario.gains.leakage > 0) return true;
    return circular ? any(({ q, u }) => [q, u]) : any(({ u, v }) => [u, v]);
  });
}

export class Sky {
  /** (4 x channels) real and imaginary parts of Stokes I, Q, U, V of the row at hand; Q, U, V only where `polarized` */
  readonly real: Float64Array;
  readonly imag: Float64Array;
  readonly polarized: boolean;
  private readonly byField: readonly (readonly Component[])[];
  private readonly observation: Observation;

  constructor(observation: Observation) {
    this.observation = observation;
    const { scenario } = observation;
    this.polarized = scenario.sky.some(({ q, u, v }) => q !== 0 || u !== 0 || v !== 0);
    this.real = new Float64Array(4 * observation.channels);
    this.imag = new Float64Array(4 * observation.channels);
    const components = scenario.sky.map((source) => ({
      source,
      component: componentOf(source, observation),
    }));
    this.byField = scenario.fields.map((_, field) =>
      components
        .filter(({ source }) => source.fields?.includes(field + 1) ?? true)
        .map(({ component }) => component),
    );
  }

  /** Fill `real` and `imag` for one row. */
  fill(time: number, geometry: RowGeometry): void {
    const { channels, fieldAt } = this.observation;
    const used = this.polarized ? 4 * channels : channels;
    this.real.fill(0, 0, used);
    this.imag.fill(0, 0, used);
    for (const component of this.byField[fieldAt[time]!]!) this.add(component, time, geometry);
  }

  private add(component: Component, time: number, geometry: RowGeometry): void {
    const { observation, polarized, real, imag } = this;
    const { channels, setup, channelStep, fields, fieldAt, scenario } = observation;
    const perSubband = observation.shape.channels;
    const { u, v, w, untracked } = geometry;
    const { l, m, nMinus1, flux, stokes } = component;
    const delay = u * l + v * m + w * nMinus1 + untracked;
    const brightness = component.transit === null ? 1 : this.passing(component.transit, time);
    const declination = fields[fieldAt[time]!]!.declination;
    const sinD = Math.sin(declination);
    const cosD = Math.cos(declination);
    const delayRate = EARTH_ROTATION_RATE * ((w * cosD - v * sinD) * l + u * sinD * m - u * cosD * nMinus1);
    const smearing = scenario.smearing;
    const bandwidth = smearing ? sinc(setup.channelWidths[0]! * delay) : 1;
    const turnsPerHertz = smearing ? delayRate * observation.integration : 0;
    const along = component.major * (u * component.sinAngle + v * component.cosAngle);
    const across = component.minor * (u * component.cosAngle - v * component.sinAngle);
    const decay = (Math.PI ** 2 / FOUR_LN_2) * (along * along + across * across);
    const stepRe = Math.cos(2 * Math.PI * channelStep * delay);
    const stepIm = -Math.sin(2 * Math.PI * channelStep * delay);
    for (let start = 0; start < channels; start += perSubband) {
      const phase = -2 * Math.PI * setup.frequencies[start]! * delay;
      let re = Math.cos(phase) * brightness * bandwidth;
      let im = Math.sin(phase) * brightness * bandwidth;
      for (let c = start; c < start + perSubband; c++) {
        const nu = setup.frequencies[c]!;
        let size = flux[c]!;
        if (turnsPerHertz !== 0) size *= sinc(turnsPerHertz * nu);
        if (decay !== 0) size *= Math.exp(-decay * nu * nu);
        const x = size * re;
        const y = size * im;
        real[c]! += x;
        imag[c]! += y;
        if (polarized) {
          for (let s = 1; s < 4; s++) {
            real[s * channels + c]! += stokes[s]! * x;
            imag[s * channels + c]! += stokes[s]! * y;
          }
        }
        // The phase runs evenly across the sub-band: turn by one step instead of a sine and cosine a channel.
        const turned = re * stepRe - im * stepIm;
        im = re * stepIm + im * stepRe;
        re = turned;
      }
    }
  }

  private passing(transit: { at: number; width: number }, time: number): number {
    const seconds = (this.observation.times[time]! - this.observation.start) * SECONDS_PER_DAY;
    const x = (seconds - transit.at) / transit.width;
    return Math.exp(-FOUR_LN_2 * x * x);
  }
}

function componentOf(source: Source, observation: Observation): Component {
  const l = Math.sin(source.east);
  const m = Math.sin(source.north);
  const rr = l * l + m * m;
  const reference = source.reference ?? observation.bandCentre;
  const flux = observation.setup.frequencies.map((nu) => {
    const continuum = source.flux * (nu / reference) ** source.spectral_index;
    if (source.line === undefined) return continuum;
    const x = (nu - source.line.centre) / source.line.width;
    return continuum + source.line.flux * Math.exp(-FOUR_LN_2 * x * x);
  });
  return {
    l,
    m,
    // n - 1 without the subtraction that loses half the digits near the phase centre
    nMinus1: -rr / (1 + Math.sqrt(1 - rr)),
    flux,
    major: source.major,
    minor: source.minor ?? source.major,
    sinAngle: Math.sin(source.angle),
    cosAngle: Math.cos(source.angle),
    stokes: [1, source.q, source.u, source.v],
    transit: source.transit ?? null,
  };
}

/** sin(pi x)/(pi x) */
export function sinc(x: number): number {
  const angle = Math.PI * x;
  // Below this the next term, angle^4/120, is under the last bit.
  if (Math.abs(angle) < 1e-4) return 1 - (angle * angle) / 6;
  return Math.sin(angle) / angle;
}
