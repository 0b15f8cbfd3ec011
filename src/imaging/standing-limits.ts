/** Limits on the dynamic range that belong to the whole dataset: noise, and what happens at the edge of the field. */
import { planeDepth } from "../geometry/w-term.ts";
import { formatFlux, formatNumber, formatPercent } from "../util/units.ts";
import type { MadeBeam } from "./beams.ts";
import { edgeDynamicRange } from "./edge-caps.ts";
import type { EdgeSamples } from "./edge-samples.ts";
import type { WTerm } from "./image.ts";
import type { RankedLimit, SourceLevel } from "./limits.ts";
import type { Plan } from "./plan.ts";
import type { Sampling } from "./sampling.ts";
import type { SmearingResult } from "./smearing.ts";
import { brightness, medianKnown } from "./thermal.ts";
import type { WLoss } from "./w-loss.ts";

/** What is lost below this at the edge of the field limits no image: common practice, no source. */
const LEAST_LOSS = 0.01;

export interface Standing {
  readonly plan: Plan;
  readonly planned: MadeBeam;
  readonly wTerm: WTerm;
  readonly wLoss: WLoss;
  readonly smearing: SmearingResult;
  readonly samples: EdgeSamples;
  /** of the field's edge, sine of its angle */
  readonly radius: number;
  /** width over which an rms is taken, radians */
  readonly field: number;
  readonly level: SourceLevel;
}

export function standingLimits(standing: Standing): RankedLimit[] {
  return [noiseLimit(standing), wLimit(standing), smearingLimit(standing)].filter(
    (limit): limit is RankedLimit =>
      limit !== null && limit.dynamicRangeFraction > 0 && Number.isFinite(limit.dynamicRangeFraction),
  );
}

function whole(cause: string, range: number, text: string): RankedLimit {
  return { event: null, eventIndex: null, cause, dynamicRangeFraction: range, text };
}

function noiseLimit({ planned, level }: Standing): RankedLimit {
  const range = level.brightness / planned.noise;
  const text = `thermal noise of ${formatFlux(planned.noise)} under a source of ${formatFlux(level.brightness)} allows a dynamic range of ${formatNumber(range)}`;
  return whole("thermal-noise", range, text);
}

function wLimit(standing: Standing): RankedLimit | null {
  const { plan, wTerm } = standing;
  if (plan.correctsW.value || !(wTerm.edgeLossFraction > LEAST_LOSS)) return null;
  const range = wDynamicRange(standing);
  const text = `w not corrected: around a source at the edge of the field, which loses ${formatPercent(wTerm.edgeLossFraction)}, the dynamic range is ${formatNumber(range)}`;
  return whole("w-term", range, text);
}

function smearingLimit({ smearing, samples, field }: Standing): RankedLimit | null {
  if (!(smearing.loss > LEAST_LOSS)) return null;
  const range = edgeDynamicRange(samples, field, (i) => [smearing.kept[i]! - 1, 0]);
  const cause =
    smearing.bandwidthLossFraction >= smearing.timeLossFraction ? "bandwidth-smearing" : "time-smearing";
  const text = `smearing of ${formatPercent(smearing.loss)} at the edge of the field: what a source there loses leaves stripes and sidelobes around it at a dynamic range of ${formatNumber(range)}`;
  return whole(cause, range, text);
}

/** Peak over rms around a source at the edge of the field when the phases that w leaves stay, its displacement apart. */
function wDynamicRange({ samples, radius, wLoss, field }: Standing): number {
  const depth = planeDepth(radius);
  return edgeDynamicRange(samples, field, (i) => {
    const turns = samples.w[i]! * depth + samples.u[i]! * wLoss.east + samples.v[i]! * wLoss.north;
    return [Math.cos(2 * Math.PI * turns) - 1, Math.sin(2 * Math.PI * turns)];
  });
}

/** What errors are measured against. */
export function sourceLevel(sampling: Sampling): SourceLevel {
  const { survey } = sampling;
  return {
    brightness: sampling.totalWeight > 0 ? brightness(sampling) : Number.NaN,
    sampleNoise: medianKnown(survey.levels.sigma, Number.MIN_VALUE),
  };
}
