/**
 * What the planned image would suffer from this dataset: beams and noise of three weightings, coverage, the w term,
 * smearing, what caps the dynamic range, and what the imaging run should be told. One pass over the weights; a second
 * one, over the samples of the events, where there are any.
 */
import type { Weighting } from "../dataset/plan-request.ts";
import type { Selection } from "../dataset/selection.ts";
import type { DetectedEvent } from "../detect/event.ts";
import type { Survey } from "../measure/survey-result.ts";
import type { Measure } from "../measure/table.ts";
import type { Workers } from "../util/workers.ts";
import { adviceOf, type DropW, LEAST_W_LOSS } from "./advice.ts";
import { BeamMaker, gridFormOf, pictureOf, reportBeam } from "./beams.ts";
import { calibratorLimits, calibratorMeasures, judgeCalibrator } from "./calibrator.ts";
import { costsOf, type GriddedImage, type SelectionCost } from "./cost.ts";
import { coverageFormOf, judgeCoverage, unflaggedCoverage } from "./coverage.ts";
import { weightingName } from "./derive-plan.ts";
import { edgeSamples, factorLookup } from "./edge-samples.ts";
import type { ForecastParts, NamedBeam } from "./forecast-parts.ts";
import { expectedW, type GeometryReport, geometryMeasures, judgeTracks } from "./geometry-report.ts";
import { type GridRequest, gridDataset } from "./grid-dataset.ts";
import type { BeamPicture, ImageForecast, WeightingResult } from "./image.ts";
import { imageMeasures } from "./image-measures.ts";
import { eventLimits } from "./limits.ts";
import { withAntennas } from "./other-noise.ts";
import type { Plan } from "./plan.ts";
import { type Sampling, samplingOf } from "./sampling.ts";
import { smearingAt } from "./smearing.ts";
import { sourceLevel, standingLimits } from "./standing-limits.ts";
import { fillWeightedVariance, measuredSefd } from "./thermal.ts";
import { trackW } from "./track-w.ts";
import { wLossAt } from "./w-loss.ts";
import { snapshotsOf, W_PHASE_LIMIT, wByAntenna, wByBaseline, wTermOf } from "./w-report.ts";

export interface ForecastRequest {
  /** what was detected, for the limits on the dynamic range */
  readonly events?: readonly DetectedEvent[];
  /** told the share of the work that is done, 0..1 */
  readonly onProgress?: (share: number) => void;
  /** threads that share the passes over the weights; none: this one reads them. The result is the same. */
  readonly workers?: Workers | undefined;
}

export interface Forecast {
  readonly image: ImageForecast;
  readonly picture: BeamPicture | null;
  readonly measures: readonly Measure[];
  /** What dropping each of these selections would cost; a pass over the weights for them all. */
  costs(selections: readonly Selection[]): Promise<SelectionCost[]>;
}

export async function forecast(survey: Survey, plan: Plan, request: ForecastRequest = {}): Promise<Forecast> {
  const { events = [], onProgress } = request;
  const image = await gridImage(survey, plan, (share) => onProgress?.(0.6 * share), request.workers);
  const { sampling } = image.request;
  const weightings = beamsOf(image);
  onProgress?.(0.8);
  const geometry = judgeTracks(sampling);
  const parts = await partsOf(image, weightings, geometry, events);
  const dropW = await dropCost(image, parts);
  onProgress?.(1);
  const radius = Math.sin(plan.fieldOfView.value / 2);
  const snapshots = snapshotsOf(sampling, parts.trackW.w, radius);
  return {
    image: reportImage(parts, image.maker.field, dropW),
    picture: pictureOf(parts.planned, weightingName(plan.weighting.value)),
    measures: [
      ...imageMeasures(parts, snapshots, wByAntenna(parts.baselines)),
      ...geometryMeasures(sampling, geometry, radius),
      ...calibratorMeasures(parts.calibrator, plan.dynamicRange.value),
    ],
    costs: (selections) => costsOf(image, selections),
  };
}

async function gridImage(
  survey: Survey,
  plan: Plan,
  onProgress: (share: number) => void,
  workers: Workers | undefined,
): Promise<GriddedImage> {
  const sampling = samplingOf(survey);
  const variance = withAntennas(survey, fillWeightedVariance(sampling));
  const coverageForm = coverageFormOf(sampling, plan);
  const request: GridRequest = {
    sampling,
    variance,
    form: gridFormOf(sampling, plan, noiseBound(sampling, variance)),
    coverageForm,
    workers,
  };
  const gridded = await gridDataset({ ...request, onProgress });
  return {
    request,
    plan,
    gridded,
    cells: gridded.grid.cells(),
    maker: new BeamMaker(request.form),
    whole: { current: null },
  };
}

function beamsOf({ plan, maker, cells }: GriddedImage): NamedBeam[] {
  return compared(plan.weighting.value).map((weighting) => ({
    weighting,
    name: weightingName(weighting),
    planned: sameWeighting(weighting, plan.weighting.value),
    made: maker.make(cells, weighting),
  }));
}

async function partsOf(
  image: GriddedImage,
  weightings: readonly NamedBeam[],
  geometry: GeometryReport,
  events: readonly DetectedEvent[],
): Promise<ForecastParts> {
  const { plan, gridded, cells } = image;
  const { sampling, variance } = image.request;
  const planned = weightings.find((named) => named.planned)!.made;
  const natural = weightings.find((named) => named.weighting.kind === "natural")!.made;
  const wOf = trackW(sampling, expectedW(sampling, geometry.judged));
  const radius = Math.sin(plan.fieldOfView.value / 2);
  const samples = edgeSamples(sampling, wOf.w, factorLookup(cells, planned.factors));
  const loss = wLossAt(samples, radius);
  const baselines = wByBaseline(sampling, wOf.w, samples, radius, plan.dishDiameter.value);
  const wTerm = wTermOf(baselines, loss, plan.fieldOfView.value);
  const smearing = smearingAt(samples, radius, sampling.field.declination);
  const level = sourceLevel(sampling);
  const calibrator =
    plan.purpose.value === "calibrator" ? await judgeCalibrator(image, sampling, variance) : null;
  const limits = [
    ...calibratorLimits(calibrator),
    ...(await eventLimits(image, events, level)),
    ...standingLimits({
      plan,
      planned,
      wTerm,
      wLoss: loss,
      smearing,
      samples,
      radius,
      field: image.maker.field,
      level,
    }),
  ].sort((a, b) => a.dynamicRangeFraction - b.dynamicRangeFraction);
  return {
    sampling,
    plan,
    calibrated: sampling.survey.dataset.unit === "Jy",
    weightings,
    planned,
    natural,
    coverage: judgeCoverage(gridded.coverage, cells, plan),
    unflagged: unflaggedCoverage(gridded, cells, plan),
    trackW: wOf,
    wTerm,
    wShift: Math.hypot(loss.east, loss.north),
    baselines,
    smearing,
    limits,
    calibrator,
    sefd: measuredSefd(sampling),
  };
}

/**
 * The forecast of the data as they are, with that of the data after the suggested flags beside it. Limits, smearing,
 * the w term and the advice are those of the data as they are.
 */
export function forecastAfter(before: ImageForecast, after: ImageForecast): ImageForecast {
  return {
    ...before,
    weightings: before.weightings.map((result) => ({
      ...result,
      after:
        after.weightings.find(
          (other) => other.weighting === result.weighting && other.robust === result.robust,
        )?.before ?? null,
    })),
    coverage: { before: before.coverage.before, after: after.coverage.before },
  };
}

/** No sum of weight^2 x variance of the image's samples exceeds it. */
function noiseBound(sampling: Sampling, variance: Float64Array): number {
  let most = 0;
  for (const value of variance) if (value > most) most = value;
  return most * sampling.totalWeight * 1.01;
}

/** Natural, uniform and robust: the plan's robustness, or 0. */
function compared(planned: Weighting): Weighting[] {
  const robust: Weighting = planned.kind === "robust" ? planned : { kind: "robust", robust: 0 };
  return [{ kind: "natural" }, robust, { kind: "uniform" }];
}

function sameWeighting(a: Weighting, b: Weighting): boolean {
  return a.kind === b.kind && (a.kind !== "robust" || b.kind !== "robust" || a.robust === b.robust);
}

/** What dropping every baseline beyond the w that needs no correction would cost. */
async function dropCost(image: GriddedImage, parts: ForecastParts): Promise<DropW | null> {
  const { plan, wTerm, baselines } = parts;
  if (plan.correctsW.value || !(wTerm.edgeLossFraction >= LEAST_W_LOSS)) return null;
  // Where a choice of the baselines is looked at one by one, they can not all be named.
  if (parts.sampling.survey.others !== undefined) return null;
  const far = baselines.filter((baseline) => baseline.phase > W_PHASE_LIMIT);
  const used = baselines.filter((baseline) => baseline.weightFraction > 0);
  if (far.length === used.length) return null;
  const [cost] = await costsOf(image, [
    {
      antennas: null,
      baselines: far.map(({ antenna1, antenna2 }) => [antenna1, antenna2]),
      time: null,
      subbands: null,
      channels: null,
      polarizations: null,
      fields: null,
    },
  ]);
  const grown = (1 + cost!.beamMajorChangeFraction) * (1 + cost!.beamMinorChangeFraction);
  return {
    baselines: far.length,
    of: used.length,
    sensitivityLoss: cost!.sensitivityLossFraction,
    beamGrowth: Math.sqrt(grown) - 1,
  };
}

function reportImage(parts: ForecastParts, computedField: number, dropW: DropW | null): ImageForecast {
  const { calibrated, plan } = parts;
  return {
    weightings: parts.weightings.map(
      ({ weighting, planned, made }): WeightingResult => ({
        weighting: weighting.kind,
        robust: weighting.kind === "robust" ? weighting.robust : null,
        planned,
        before: reportBeam(made, calibrated),
        after: null,
      }),
    ),
    wTerm: parts.wTerm,
    smearing: {
      bandwidthLossFraction: parts.smearing.bandwidthLossFraction,
      timeLossFraction: parts.smearing.timeLossFraction,
      safeChannelHz: parts.smearing.safeChannelHz,
      safeIntegrationSeconds: parts.smearing.safeIntegrationSeconds,
      safeLossFraction: parts.smearing.safeLossFraction,
    },
    coverage: { before: parts.coverage.coverage, after: null },
    limits: parts.limits.map(({ cause, dynamicRangeFraction, text }) => ({
      cause,
      dynamicRangeFraction,
      text,
    })),
    advice: adviceOf({
      plan,
      computedField,
      planned: parts.planned,
      weightings: parts.weightings,
      wTerm: parts.wTerm,
      dropW,
      wZeroed: parts.trackW.zeroed,
      smearing: parts.smearing,
      coverage: parts.coverage,
      unflagged: parts.unflagged,
      baselines: parts.baselines,
      calibrated,
    }),
  };
}
