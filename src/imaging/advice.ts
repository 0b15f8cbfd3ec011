/** What the imaging run should be told, in plain words and numbers. */
import {
  formatAngle,
  formatDuration,
  formatFlux,
  formatFrequency,
  formatNumber,
  formatPercent,
} from "../util/units.ts";
import { type MadeBeam, RADIANS_PER_ARCSEC } from "./beams.ts";
import type { CoverageResult } from "./coverage.ts";
import { weightingName } from "./derive-plan.ts";
import type { Advice, Coverage, WTerm } from "./image.ts";
import type { Plan } from "./plan.ts";
import type { SmearingResult } from "./smearing.ts";
import type { BaselineW } from "./w-report.ts";

/** Pixels across the minor axis of the beam: 3 to 5 is common practice, no source. */
const PIXELS_PER_BEAM = 4;
/** Deconvolution stops at this many times the noise: common practice, no source. */
const STOP_SIGMAS = 3;
/** A loss at the edge of the field below this needs no way out: common practice, no source. */
export const LEAST_W_LOSS = 0.005;
/** A spacing group beyond a hole of this ratio stands apart. */
const APART = 1.5;

export interface AdviceInput {
  readonly plan: Plan;
  /** full width that the beams were computed over, radians */
  readonly computedField: number;
  readonly planned: MadeBeam;
  readonly weightings: readonly { readonly name: string; readonly made: MadeBeam }[];
  readonly wTerm: WTerm;
  /** what dropping the baselines beyond the w that needs no correction would cost, null when there is no need */
  readonly dropW: DropW | null;
  readonly wZeroed: boolean;
  readonly smearing: SmearingResult;
  readonly coverage: CoverageResult;
  readonly unflagged: Coverage;
  readonly baselines: readonly BaselineW[];
  readonly calibrated: boolean;
}

export interface DropW {
  readonly baselines: number;
  readonly of: number;
  readonly sensitivityLoss: number;
  /** geometric mean of the beam's axes, relative change */
  readonly beamGrowth: number;
}

export function adviceOf(input: AdviceInput): Advice[] {
  return [
    ...sizeAdvice(input),
    ...weightingAdvice(input),
    ...wAdvice(input),
    averagingAdvice(input.smearing),
    ...noiseAdvice(input),
    ...flagAdvice(input),
    spacingAdvice(input),
    deconvolutionAdvice(input),
  ];
}

function sizeAdvice({ plan, planned, computedField }: AdviceInput): Advice[] {
  const { minor } = planned.ellipse;
  const advice: Advice[] = [];
  if (minor > 0) {
    const cell = niceCell(minor / PIXELS_PER_BEAM);
    const field = plan.fieldOfView.value;
    const pixels = smoothSize(Math.ceil(field / cell));
    advice.push({
      name: "Cell size",
      value: formatAngle(cell),
      why: `${formatNumber(minor / cell)} pixels across the beam's minor axis of ${formatAngle(minor)}`,
    });
    advice.push({
      name: "Image size",
      value: `${pixels} x ${pixels} pixels`,
      why: `${formatAngle(field)} of field, rounded up to a product of 2, 3 and 5`,
    });
  }
  if (computedField < plan.fieldOfView.value * 0.999) {
    advice.push({
      name: "Beam computed over",
      value: formatAngle(computedField),
      why: "the planned field holds more resolutions than the beam was computed for; weights are of cells of 1/that",
    });
  }
  return advice;
}

/** Two significant digits, rounded down, so that sheets read well. */
function niceCell(radians: number): number {
  const arcsec = radians / RADIANS_PER_ARCSEC;
  const scale = 10 ** (Math.floor(Math.log10(arcsec)) - 1);
  return Math.floor(arcsec / scale + 1e-9) * scale * RADIANS_PER_ARCSEC;
}

/** Smallest even product of 2, 3 and 5 that is at least `pixels`. */
export function smoothSize(pixels: number): number {
  let best = Number.POSITIVE_INFINITY;
  for (let fives = 1; fives < best; fives *= 5) {
    for (let threes = fives; threes < best; threes *= 3) {
      const twos = Math.max(1, Math.ceil(Math.log2(pixels / threes) - 1e-12));
      const size = threes * 2 ** twos;
      if (size >= pixels && size < best) best = size;
    }
    if (fives > pixels) break;
  }
  return best;
}

function weightingAdvice({ plan, weightings, calibrated }: AdviceInput): Advice[] {
  const noiseOf = (made: MadeBeam) => (calibrated ? formatFlux(made.noise) : "unknown");
  return [
    {
      name: "Weighting",
      value: weightingName(plan.weighting.value),
      why: plan.weighting.how,
    },
    ...weightings.map(({ name, made }) => ({
      name: `With ${name}`,
      value: `${formatAngle(made.ellipse.major)} x ${formatAngle(made.ellipse.minor)}`,
      why: `worst sidelobe ${formatPercent(Math.abs(made.sidelobes.peak))}, noise ${noiseOf(made)}`,
    })),
  ];
}

function wAdvice({ plan, wTerm, dropW, wZeroed }: AdviceInput): Advice[] {
  const advice: Advice[] = [];
  if (wZeroed) {
    advice.push({
      name: "w in the file",
      value: "zero",
      why:
        "the delays were removed towards one direction, and w was set to zero with them: that corrects that direction " +
        "and no other; the w used here is recomputed from the antenna positions",
    });
  }
  if (!wTerm.known) {
    return [
      ...advice,
      { name: "w term", value: "unknown", why: "the file has no w and too little to compute it from" },
    ];
  }
  const limit = `${wTerm.phaseLimitRad} rad`;
  const open = wTerm.uncorrectedFieldArcsec * RADIANS_PER_ARCSEC;
  if (wTerm.edgePhaseRad <= wTerm.phaseLimitRad) {
    return [
      ...advice,
      {
        name: "w term",
        value: "no correction needed",
        why: `the largest |w|, ${formatNumber(wTerm.largestWavelengths)} wavelengths, leaves ${formatNumber(wTerm.edgePhaseRad)} rad at the edge of the field`,
      },
    ];
  }
  if (!plan.correctsW.value && !(wTerm.edgeLossFraction >= LEAST_W_LOSS)) {
    return [
      ...advice,
      {
        name: "w term",
        value: "no correction needed",
        why: `${formatNumber(wTerm.edgePhaseRad)} rad at most, and ${formatPercent(wTerm.edgeLossFraction)} of a source, are lost at the edge; below ${limit} over ${formatAngle(open)}`,
      },
    ];
  }
  const correct = {
    name: "w planes or facets",
    value: `${wTerm.planes} planes or ${wTerm.facets} facets`,
    why: `so that no phase error at the edge of the field exceeds ${limit}`,
  };
  if (plan.correctsW.value) return [...advice, correct];
  advice.push(
    {
      name: "w term",
      value: `loses ${formatPercent(wTerm.edgeLossFraction)} at the edge`,
      why: `${formatNumber(wTerm.edgePhaseRad)} rad are left there without a correction; if that is too much, take one of the next ways out`,
    },
    { ...correct, name: "Either correct w", why: `${correct.why}; nothing else is lost` },
    {
      name: "or narrow the field",
      value: formatAngle(open),
      why: `the full width over which no sample is off by more than ${limit}`,
    },
  );
  if (dropW !== null) {
    advice.push({
      name: "or drop baselines",
      value: `${dropW.baselines} of ${dropW.of}`,
      why:
        `those beyond the w that needs no correction: the beam grows by ${formatPercent(dropW.beamGrowth)} ` +
        `and ${formatPercent(dropW.sensitivityLoss)} of the sensitivity is lost`,
    });
  }
  return advice;
}

function averagingAdvice(smearing: SmearingResult): Advice {
  const channel = Number.isFinite(smearing.safeChannelHz)
    ? formatFrequency(smearing.safeChannelHz)
    : "any channel width";
  const time = Number.isFinite(smearing.safeIntegrationSeconds)
    ? formatDuration(smearing.safeIntegrationSeconds)
    : "an unknown time";
  return {
    name: "Safe averaging",
    value: `${channel}, ${time}`,
    why: `each loses ${formatPercent(smearing.safeLossFraction)} of a source at the edge of the field; as recorded, ${formatPercent(smearing.bandwidthLossFraction)} and ${formatPercent(smearing.timeLossFraction)}`,
  };
}

function noiseAdvice({ planned, plan, calibrated }: AdviceInput): Advice[] {
  if (!calibrated || !(planned.noise > 0)) {
    const why = calibrated ? "the noise could not be measured" : "the amplitudes are not in Jy";
    return [{ name: "Noise", value: "unknown", why }];
  }
  const target = plan.targetRms.value;
  const against = target === null ? "no target is planned" : `the target is ${formatFlux(target)}`;
  return [
    {
      name: "Expected noise",
      value: `${formatFlux(planned.noise)} a beam`,
      why: `thermal, from the measured noise at the planned weighting; ${against}`,
    },
    {
      name: "Stop deconvolving at",
      value: formatFlux(STOP_SIGMAS * planned.noise),
      why: `${STOP_SIGMAS} times the expected noise; what limits the image may stop it earlier`,
    },
  ];
}

/** What the flags that are already set took from the coverage, where that is anything to speak of. */
function flagAdvice({ coverage, unflagged }: AdviceInput): Advice[] {
  const { filledFraction: now, longestSpacingWavelengths: longest } = coverage.coverage;
  const before = unflagged.filledFraction;
  if (!(now < 0.98 * before)) return [];
  const reach = unflagged.longestSpacingWavelengths;
  const shorter =
    longest < 0.98 * reach
      ? ` and the longest spacing from ${formatNumber(reach)} to ${formatNumber(longest)} wavelengths`
      : "";
  return [
    {
      name: "Flags already set",
      value: `take ${formatPercent(1 - now / before)} of the cells`,
      why: `they bring the filled cells from ${formatPercent(before)} to ${formatPercent(now)}${shorter}: see whether all are needed`,
    },
  ];
}

function spacingAdvice({ coverage, baselines }: AdviceInput): Advice {
  const { longestSpacingWavelengths: longest } = coverage.coverage;
  const shadowed = baselines.filter((baseline) => baseline.shadowed > 0);
  const outer = coverage.radial.find((gap) => gap.kind === "hole" && gap.to / gap.from >= APART);
  if (shadowed.length > 0) {
    const least = shadowed.length === 1 ? "1 baseline is" : `${shadowed.length} baselines are`;
    return {
      name: "Spacings to leave out",
      value: "below the dish diameter",
      why: `${least} projected to less than it for a time: one dish stands in front of the other`,
    };
  }
  if (outer !== undefined && outer.to > longest / 2) {
    return {
      name: "Spacings to leave out",
      value: `beyond ${formatNumber(outer.to)} wavelengths, where resolution allows`,
      why: `they stand apart behind a hole from ${formatNumber(outer.from)} wavelengths and give the beam its far sidelobes`,
    };
  }
  return {
    name: "Spacings to leave out",
    value: "none",
    why: "no shadowed baseline and no group of spacings apart",
  };
}

function deconvolutionAdvice({ coverage, plan }: AdviceInput): Advice {
  const { missingFluxFraction: missing, largestRadialGapRatioFraction: ratio } = coverage.coverage;
  const hole = coverage.radial.find((gap) => gap.kind === "hole");
  if (missing > 0.5) {
    return {
      name: "Deconvolution extrapolates",
      value: `scales near ${formatAngle(plan.largestScale.value)}`,
      why: `the shortest spacing misses ${formatPercent(missing)} of a Gaussian that wide: a point-like model favours compact sky, so total flux of smooth sky must come from elsewhere`,
    };
  }
  if (hole !== undefined && ratio > 1.3) {
    const [small, large] = [1 / hole.to, 1 / hole.from];
    return {
      name: "Deconvolution interpolates",
      value: `scales from ${formatAngle(small)} to ${formatAngle(large)}`,
      why: `no spacing from ${formatNumber(hole.from)} to ${formatNumber(hole.to)} wavelengths: point components put ripples there on smooth sky, a smoothness prior blurs compact sky`,
    };
  }
  return {
    name: "Deconvolution",
    value: "little to invent",
    why: `${formatPercent(coverage.coverage.filledFraction)} of the cells between the plan's scales are filled, without a large hole`,
  };
}
