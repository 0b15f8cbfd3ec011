/**
 * What averaging over a channel and an integration takes from a source at the edge of the field, per visibility and
 * exact for flat averages: sinc of bandwidth x delay and of averaging time x fringe rate.
 * @see Bridle & Schwab 1999, Synthesis Imaging in Radio Astronomy II, ASP Conf. Ser. 180, chapter 18
 */

import { EARTH_ROTATION_RATE } from "../geometry/sidereal.ts";
import { planeDepth } from "../geometry/w-term.ts";
import type { EdgeSamples } from "./edge-samples.ts";
import type { Smearing } from "./image.ts";

/** Directions round the edge of the field; the other half of them are the same. */
const DIRECTIONS = 8;
/** Peak that safe averaging may lose at the edge of the field, bandwidth and time each: common practice, no source. */
const SAFE_LOSS = 0.01;

export interface SmearingResult extends Smearing {
  readonly bandwidthLossMean: number;
  readonly timeLossMean: number;
  /** both together, worst direction */
  readonly loss: number;
  /** (samples) what is left of each visibility in that direction */
  readonly kept: Float64Array;
}

/** sin(pi x)/(pi x) */
export function sinc(x: number): number {
  const t = Math.PI * x;
  return Math.abs(t) < 1e-6 ? 1 - (t * t) / 6 : Math.sin(t) / t;
}

/**
 * @param radius of the edge of the field, sine of its angle from the phase centre
 * @param declination radians; NaN (unknown) leaves the time losses unknown
 */
export function smearingAt(samples: EdgeSamples, radius: number, declination: number): SmearingResult {
  const edge = new EdgeSum(samples, radius, declination);
  const both = edge.losses(1, 1);
  const bandwidth = edge.losses(1, 0);
  const time = edge.losses(0, 1);
  const width = typical(samples.channelWidth, samples.natural);
  const seconds = typical(samples.integration, samples.natural);
  return {
    bandwidthLossFraction: bandwidth.worst,
    bandwidthLossMean: bandwidth.mean,
    timeLossFraction: time.worst,
    timeLossMean: time.mean,
    loss: both.worst,
    kept: edge.kept(both.direction, 1, 1).slice(),
    safeChannelHz: width * safeFactor((factor) => edge.losses(factor, 0).worst),
    safeIntegrationSeconds: seconds * safeFactor((factor) => edge.losses(0, factor).worst),
    safeLossFraction: SAFE_LOSS,
  };
}

/** Delays and fringe rates of a ring of sources at the edge, times channel width and integration: what sinc takes. */
class EdgeSum {
  private readonly weight: Float64Array;
  private readonly total: number;
  /** (directions x samples) */
  private readonly delay: Float64Array;
  private readonly rate: Float64Array;
  private readonly left: Float64Array;

  constructor(samples: EdgeSamples, radius: number, declination: number) {
    const { count, u, v, w, frequency, channelWidth, integration } = samples;
    const depth = planeDepth(radius);
    const cosD = Math.cos(declination);
    const sinD = Math.sin(declination);
    this.weight = samples.weight;
    this.total = samples.weight.reduce((sum, weight) => sum + weight, 0);
    this.delay = new Float64Array(DIRECTIONS * count);
    this.rate = new Float64Array(DIRECTIONS * count);
    this.left = new Float64Array(count);
    for (let d = 0; d < DIRECTIONS; d++) {
      const l = radius * Math.sin((Math.PI * d) / DIRECTIONS);
      const m = radius * Math.cos((Math.PI * d) / DIRECTIONS);
      for (let i = 0; i < count; i++) {
        const at = d * count + i;
        // w that is unknown (NaN) leaves its small part out.
        const known = Number.isFinite(w[i]!) ? w[i]! : 0;
        this.delay[at] = (channelWidth[i]! * (u[i]! * l + v[i]! * m - known * depth)) / frequency[i]!;
        const perRadian = (known * cosD - v[i]! * sinD) * l + u[i]! * sinD * m + u[i]! * cosD * depth;
        this.rate[at] = integration[i]! * EARTH_ROTATION_RATE * perRadian;
      }
    }
  }

  /** Peak lost with the channels and integrations that many times as wide, and the direction where it is worst. */
  losses(channelFactor: number, timeFactor: number): { worst: number; mean: number; direction: number } {
    const { weight, total } = this;
    const result = { worst: 0, mean: 0, direction: 0 };
    if (!(total > 0)) return { worst: Number.NaN, mean: Number.NaN, direction: 0 };
    for (let d = 0; d < DIRECTIONS; d++) {
      const kept = this.kept(d, channelFactor, timeFactor);
      let sum = 0;
      for (let i = 0; i < kept.length; i++) sum += weight[i]! * kept[i]!;
      const loss = 1 - sum / total;
      result.mean += loss / DIRECTIONS;
      // NaN is the worst: it says that the loss is unknown.
      if (!(loss <= result.worst)) {
        result.worst = loss;
        result.direction = d;
      }
    }
    return result;
  }

  /** (samples) What averaging leaves of each visibility of a source in a direction. Valid until the next call. */
  kept(direction: number, channelFactor: number, timeFactor: number): Float64Array {
    const { delay, rate, left } = this;
    const from = direction * left.length;
    for (let i = 0; i < left.length; i++) {
      left[i] =
        (channelFactor > 0 ? sinc(channelFactor * delay[from + i]!) : 1) *
        (timeFactor > 0 ? sinc(timeFactor * rate[from + i]!) : 1);
    }
    return left;
  }
}

/** How many times wider the averages may be. The loss grows as the square while it is small. */
function safeFactor(loss: (factor: number) => number): number {
  const now = loss(1);
  if (Number.isNaN(now)) return Number.NaN;
  if (now === 0) return Number.POSITIVE_INFINITY;
  let factor = Math.min(1, Math.sqrt(SAFE_LOSS / now));
  for (let step = 0; step < 6; step++) {
    const next = loss(factor);
    if (!(next > 0)) return factor;
    const ratio = Math.sqrt(SAFE_LOSS / next);
    factor *= ratio;
    if (Math.abs(ratio - 1) < 1e-3) break;
  }
  return factor;
}

/** Weighted mean of a column. */
function typical(values: Float64Array, weight: Float64Array): number {
  let sum = 0;
  let total = 0;
  for (let i = 0; i < values.length; i++) {
    if (!Number.isFinite(values[i]!)) continue;
    sum += weight[i]! * values[i]!;
    total += weight[i]!;
  }
  return total > 0 ? sum / total : Number.NaN;
}
