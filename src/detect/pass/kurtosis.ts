/**
 * Spectral kurtosis of each channel, baseline by baseline: whether its power over time is that of noise, steadier as a
 * carrier's is, or comes and goes. It needs no level to compare with.
 */
import { spectralKurtosis, spectralKurtosisLimits } from "../statistics/spectral-kurtosis.ts";
import type { Band } from "./bands.ts";
import type { Plane } from "./plane.ts";
import type { KurtosisTallies } from "./tile-result.ts";

/** Integrations below which the limits are no good approximation. */
const FEWEST = 16;

/** Planes (a baseline and product in a tile each) by what their channels' powers do. */
export interface KurtosisCounts {
  readonly planes: number;
  /** below the limit that noise crosses once in 741 times */
  readonly steady: number;
  /** above its upper limit */
  readonly unsteady: number;
}

export class ChannelKurtosis implements KurtosisTallies {
  private readonly polarizations: number;
  /** (columns of all bands x polarizations) */
  readonly planes: KurtosisTallies["planes"];
  readonly steady: KurtosisTallies["steady"];
  readonly unsteady: KurtosisTallies["unsteady"];
  private sums = new Float64Array(0);
  private squares = new Float64Array(0);
  private counts = new Int32Array(0);

  constructor(columns: number, polarizations: number) {
    this.polarizations = polarizations;
    this.planes = new Uint32Array(columns * polarizations);
    this.steady = new Uint32Array(columns * polarizations);
    this.unsteady = new Uint32Array(columns * polarizations);
  }

  /** Count a plane whose `power` is |V - background|^2. */
  add({ rows, columns, power, marks }: Plane, band: Band, polarization: number): void {
    if (rows < FEWEST) return;
    if (this.sums.length < columns) {
      this.sums = new Float64Array(columns);
      this.squares = new Float64Array(columns);
      this.counts = new Int32Array(columns);
    }
    const { sums, squares, counts } = this;
    sums.fill(0, 0, columns);
    squares.fill(0, 0, columns);
    counts.fill(0, 0, columns);
    for (let row = 0; row < rows; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (marks[i] !== 0) continue;
        const p = power[i]!;
        sums[c]! += p;
        squares[c]! += p * p;
        counts[c]! += 1;
      }
    }
    for (let c = 0; c < columns; c++) {
      const n = counts[c]!;
      if (n < FEWEST) continue;
      const at = (band.first + c) * this.polarizations + polarization;
      const { lower, upper } = limitsOf(n);
      const value = spectralKurtosis(sums[c]!, squares[c]!, n);
      this.planes[at]! += 1;
      if (value < lower) this.steady[at]! += 1;
      else if (value > upper) this.unsteady[at]! += 1;
    }
  }

  /** What another thread can be sent. */
  plain(): KurtosisTallies {
    const { planes, steady, unsteady } = this;
    return { planes, steady, unsteady };
  }

  /** Add the planes of a tile. */
  join({ planes, steady, unsteady }: KurtosisTallies): void {
    for (let i = 0; i < planes.length; i++) {
      this.planes[i]! += planes[i]!;
      this.steady[i]! += steady[i]!;
      this.unsteady[i]! += unsteady[i]!;
    }
  }

  /** Columns [low, high] over all sub-bands, and the products where `chosen` is 1; null: all. */
  countsOf(low: number, high: number, chosen: Uint8Array | null): KurtosisCounts {
    const total = { planes: 0, steady: 0, unsteady: 0 };
    for (let column = low; column <= high; column++) {
      for (let p = 0; p < this.polarizations; p++) {
        if (chosen !== null && chosen[p] !== 1) continue;
        const at = column * this.polarizations + p;
        total.planes += this.planes[at]!;
        total.steady += this.steady[at]!;
        total.unsteady += this.unsteady[at]!;
      }
    }
    return total;
  }
}

/** By count of powers: dear to compute, and the same for every tile. */
const LIMITS = new Map<number, { readonly lower: number; readonly upper: number }>();

function limitsOf(count: number): { readonly lower: number; readonly upper: number } {
  let limits = LIMITS.get(count);
  if (limits === undefined) {
    limits = spectralKurtosisLimits(count);
    LIMITS.set(count, limits);
  }
  return limits;
}
