/**
 * The plan with every value filled in: what the user gave, what the file says, what follows from the baselines, and
 * stated defaults, each with where it came from.
 */

import type { Dataset } from "../dataset/dataset.ts";
import type { LineRange, PlanRequest } from "../dataset/plan-request.ts";
import type { Survey } from "../measure/survey-result.ts";
import { SPEED_OF_LIGHT } from "../util/constants.ts";
import { InputError } from "../util/errors.ts";
import { formatFlux, formatFrequency, formatLength, formatNumber } from "../util/units.ts";
import type { Plan, PlanValue } from "./plan.ts";
import { type Sampling, samplingOf } from "./sampling.ts";
import { brightness, naturalNoise } from "./thermal.ts";

/** Full width at half power of the primary beam over lambda/D (handbook of a millimetre array; 10 dB edge taper gives 1.14). */
const PRIMARY_BEAM_FACTOR = 1.13;
/** Largest angular scale over lambda/b_min (common practice; the shortest baseline sees 28 % of such a Gaussian). */
export const LARGEST_SCALE_FACTOR = 0.6;
/** Width of the field in resolutions where no dish diameter is known: common practice, no source. */
const FIELD_IN_BEAMS = 100;
/** What imaging of ordinary data reaches: common practice, no source. Above it, the user should say so. */
const MOST_DYNAMIC_RANGE = 10_000;
/** Weightings other than natural have more noise: what is planned of the thermal limit. Common practice, no source. */
const THERMAL_SHARE = 0.5;
/** Where the noise or the source is unknown, or the data are faint: common practice, no source. */
const LEAST_DYNAMIC_RANGE = 100;

/** @throws InputError when the request names sub-bands or channels that the dataset does not have */
export function derivePlan(request: PlanRequest, survey: Survey): Plan {
  const sampling = samplingOf(survey);
  refuseMissingChannels(request.lineChannels ?? [], survey.dataset);
  const dishDiameter = dishOf(request, survey);
  const resolution = resolutionOf(request, sampling);
  const fieldOfView = fieldOf(request, sampling, dishDiameter.value, resolution.value);
  return {
    fieldOfView,
    resolution,
    largestScale: largestScaleOf(request, sampling, resolution.value, fieldOfView.value),
    targetRms: request.targetRms === undefined ? preset(null, "none planned") : given(request.targetRms),
    dynamicRange: dynamicRangeOf(request, sampling),
    dishDiameter,
    weighting:
      request.weighting === undefined
        ? preset(
            { kind: "robust", robust: 0 },
            "robust(0), between the resolution of uniform and the noise of natural",
          )
        : given(request.weighting),
    correctsW:
      request.correctsW === undefined
        ? preset(false, "an imager that makes no w correction, until the plan says it does")
        : given(request.correctsW),
    purpose:
      request.purpose === undefined ? preset("continuum", "continuum unless said") : given(request.purpose),
    lineChannels:
      request.lineChannels === undefined ? preset([], "no line channels named") : given(request.lineChannels),
    expectedSefd:
      request.expectedSefd === undefined ? preset(null, "none given") : given(request.expectedSefd),
  };
}

function given<T>(value: T): PlanValue<T> {
  return { value, origin: "given", how: "given in the plan" };
}

function preset<T>(value: T, how: string): PlanValue<T> {
  return { value, origin: "default", how };
}

function refuseMissingChannels(ranges: readonly LineRange[], dataset: Dataset): void {
  const { subbands, channels } = dataset.shape;
  for (const {
    subband,
    channels: [, high],
  } of ranges) {
    if (subband < subbands && high < channels) continue;
    throw new InputError(
      `line_channels names sub-band ${subband}, channel ${high}: ` +
        `the dataset has sub-bands 0 to ${subbands - 1} of channels 0 to ${channels - 1}`,
      { part: "plan" },
      "Sub-bands and channels count from 0",
    );
  }
}

function dishOf(request: PlanRequest, survey: Survey): PlanValue<number | null> {
  if (request.dishDiameter !== undefined) return given(request.dishDiameter);
  const withData = new Set(survey.antennasWithData);
  const diameters = survey.dataset.array.antennas
    .filter((antenna) => withData.has(antenna.number))
    .flatMap((antenna) => (antenna.diameter !== null && antenna.diameter > 0 ? [antenna.diameter] : []))
    .sort((a, b) => a - b);
  if (diameters.length === 0) return preset(null, "the file gives no diameter");
  const smallest = diameters[0]!;
  const same = smallest === diameters.at(-1);
  const how = same
    ? "of the antenna table"
    : "the smallest of the antenna table: it has the widest primary beam";
  return { value: smallest, origin: "file", how };
}

function resolutionOf(request: PlanRequest, sampling: Sampling): PlanValue<number> {
  if (request.resolution !== undefined) return given(request.resolution);
  if (!(sampling.longest > 0)) {
    return { value: Number.NaN, origin: "derived", how: "unknown: no usable baseline" };
  }
  const how = `1.0 lambda/B of the longest usable baseline, ${formatNumber(sampling.longest)} wavelengths`;
  return { value: 1 / sampling.longest, origin: "derived", how };
}

function fieldOf(
  request: PlanRequest,
  sampling: Sampling,
  diameter: number | null,
  resolution: number,
): PlanValue<number> {
  if (request.fieldOfView !== undefined) return given(request.fieldOfView);
  const byBeams = FIELD_IN_BEAMS * resolution;
  if (diameter === null) {
    return {
      value: Math.min(byBeams, Math.PI / 2),
      origin: "derived",
      how: `${FIELD_IN_BEAMS} times the resolution, since no dish diameter is known`,
    };
  }
  const primary = (PRIMARY_BEAM_FACTOR * SPEED_OF_LIGHT) / sampling.meanFrequency / diameter;
  if (primary <= 4 * resolution) {
    return {
      value: Math.min(4 * resolution, Math.PI / 2),
      origin: "derived",
      how: "4 times the resolution, which is wider than the primary beam",
    };
  }
  const optics = `${formatLength(diameter)} antennas at ${formatFrequency(sampling.meanFrequency)}`;
  return {
    value: Math.min(primary, Math.PI / 2),
    origin: "derived",
    how: `primary beam, ${PRIMARY_BEAM_FACTOR} lambda/D of the ${optics}`,
  };
}

function largestScaleOf(
  request: PlanRequest,
  sampling: Sampling,
  resolution: number,
  field: number,
): PlanValue<number> {
  if (request.largestScale !== undefined) return given(request.largestScale);
  if (!(sampling.shortest > 0)) {
    return { value: Number.NaN, origin: "derived", how: "unknown: no usable baseline" };
  }
  const seen = LARGEST_SCALE_FACTOR / sampling.shortest;
  const spacing = `${LARGEST_SCALE_FACTOR} lambda/b of the shortest usable baseline, ${formatNumber(sampling.shortest)} wavelengths`;
  if (seen > field)
    return { value: field, origin: "derived", how: `the field of view; ${spacing} sees more` };
  if (seen < resolution) {
    return { value: resolution, origin: "derived", how: `the resolution; ${spacing} sees less` };
  }
  return { value: seen, origin: "derived", how: spacing };
}

function dynamicRangeOf(request: PlanRequest, sampling: Sampling): PlanValue<number> {
  if (request.dynamicRange !== undefined) return given(request.dynamicRange);
  const peak = brightness(sampling);
  const noise = naturalNoise(sampling);
  const reach = THERMAL_SHARE * (peak / noise);
  if (!(reach > LEAST_DYNAMIC_RANGE)) {
    const why = Number.isFinite(reach)
      ? `half of the source over the thermal noise is ${formatNumber(reach)}`
      : "the thermal limit is unknown";
    return preset(LEAST_DYNAMIC_RANGE, `${LEAST_DYNAMIC_RANGE}, since ${why}`);
  }
  const calibrated = sampling.survey.dataset.unit === "Jy";
  const ratio = calibrated
    ? `half of ${formatFlux(peak)} over the thermal noise, ${formatFlux(noise)}`
    : "half of the amplitude over the thermal noise";
  if (reach > MOST_DYNAMIC_RANGE) {
    return preset(
      MOST_DYNAMIC_RANGE,
      `${MOST_DYNAMIC_RANGE}, what ordinary imaging reaches; ${ratio} would allow ${formatNumber(reach)}`,
    );
  }
  return { value: reach, origin: "derived", how: `${ratio}, natural weighting` };
}

/** The largest scale that a shortest spacing stands for, and back: radians and wavelengths. */
export function scaleOfSpacing(wavelengths: number): number {
  return LARGEST_SCALE_FACTOR / wavelengths;
}

/** "robust(0.5)", as in plan.yaml. */
export function weightingName(weighting: Plan["weighting"]["value"]): string {
  return weighting.kind === "robust" ? `robust(${weighting.robust})` : weighting.kind;
}
