/**
 * Visibilities of a few sources: V = sum of S exp(-2 pi i (u l + v m + w (n - 1))), as the sky gives them, or as an
 * imager without a w correction, with channels and integrations of no width, takes them to be.
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., Eq. 3.7
 */
import { EARTH_ROTATION_RATE } from "../../geometry/sidereal.ts";
import type { Atoms } from "../samples/atoms.ts";

/** A point or a Gaussian. */
export interface Source {
  /** dataset unit, in the data */
  readonly flux: number;
  /** direction cosines from the image's reference point */
  readonly l: number;
  readonly m: number;
  /** second moments of a Gaussian, direction cosines squared: ll, lm, mm; 0 for a point */
  readonly shape: readonly [number, number, number];
}

/** What of the instrument a model holds. */
export interface Physics {
  readonly w: boolean;
  /** width of a channel and of an atom over channels: sources away from the centre dim */
  readonly bandwidth: boolean;
  readonly time: boolean;
}

export const PLAIN: Physics = { w: false, bandwidth: false, time: false };
export const WHOLE: Physics = { w: true, bandwidth: true, time: true };

/** A source's response at one atom, without its flux. */
export class Response {
  re = 0;
  im = 0;
  private readonly atoms: Atoms;
  private readonly physics: Physics;
  private readonly sinD: number;
  private readonly cosD: number;
  private readonly integration: number;
  /** (channels) Hz */
  private readonly width: Float64Array;

  /**
   * @param declination of the image's reference point, radians
   * @param averaged true: smeared over a whole atom, as the atom's own value is; false: over one sample
   */
  constructor(atoms: Atoms, physics: Physics, declination: number, averaged: boolean) {
    this.atoms = atoms;
    this.physics = physics;
    this.sinD = Math.sin(declination);
    this.cosD = Math.cos(declination);
    const { bins } = atoms;
    const seconds = averaged ? bins.duration : bins.integration;
    this.integration = Number.isFinite(seconds) ? seconds : 0;
    this.width = averaged ? bins.width : bins.channelWidth;
  }

  /** Sets `re` and `im`. */
  at(k: number, source: Source): void {
    const { l, m, shape } = source;
    const { atoms, physics } = this;
    const u = atoms.u[k]!;
    const v = atoms.v[k]!;
    const w = atoms.w[k]!;
    const rr = l * l + m * m;
    const nMinus1 = -rr / (1 + Math.sqrt(Math.max(0, 1 - rr)));
    const turns = u * l + v * m + w * nMinus1;
    let size = 1;
    const nu = atoms.frequency[k]!;
    if (physics.bandwidth) size *= sinc((this.width[atoms.channel[k]!]! * turns) / nu);
    if (physics.time) {
      const rate =
        EARTH_ROTATION_RATE *
        ((w * this.cosD - v * this.sinD) * l + u * this.sinD * m - u * this.cosD * nMinus1);
      size *= sinc(rate * this.integration);
    }
    if (shape[0] !== 0 || shape[2] !== 0) {
      size *= Math.exp(-2 * Math.PI ** 2 * (shape[0] * u * u + 2 * shape[1] * u * v + shape[2] * v * v));
    }
    const phase = -2 * Math.PI * (physics.w ? turns : u * l + v * m);
    this.re = size * Math.cos(phase);
    this.im = size * Math.sin(phase);
  }
}

/** sin(pi x)/(pi x) */
export function sinc(x: number): number {
  const angle = Math.PI * x;
  // Below this the next term, angle^4/120, is under the last bit.
  return Math.abs(angle) < 1e-4 ? 1 - (angle * angle) / 6 : Math.sin(angle) / angle;
}

export interface Visibilities {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/** The sum of all sources at every atom. */
export function modelOf(
  atoms: Atoms,
  sources: readonly Source[],
  physics: Physics,
  declination: number,
  averaged: boolean,
): Visibilities {
  const re = new Float64Array(atoms.count);
  const im = new Float64Array(atoms.count);
  const response = new Response(atoms, physics, declination, averaged);
  for (const source of sources) {
    for (let k = 0; k < atoms.count; k++) {
      response.at(k, source);
      re[k]! += source.flux * response.re;
      im[k]! += source.flux * response.im;
    }
  }
  return { re, im };
}
