/** The forecast as measures, for rules, reports and notebooks. */

import { type Cell, fillMeasure, type Row } from "../measure/fill-measure.ts";
import type { Measure } from "../measure/table.ts";
import { type MadeBeam, RADIANS_PER_ARCSEC } from "./beams.ts";
import type { ForecastParts } from "./forecast-parts.ts";
import type { RankedLimit } from "./limits.ts";
import {
  ANTENNA_W,
  AZIMUTHAL_GAP,
  BASELINE_W,
  IMAGE,
  LIMIT,
  RADIAL_GAP,
  SNAPSHOT,
  WEIGHTINGS,
} from "./measure-columns.ts";
import type { AntennaW, Snapshot } from "./w-report.ts";

const DEGREES = 180 / Math.PI;

export function imageMeasures(
  parts: ForecastParts,
  snapshots: readonly Snapshot[],
  antennas: readonly AntennaW[],
): Measure[] {
  return [
    fillMeasure(IMAGE, [imageRow(parts, snapshots)]),
    fillMeasure(WEIGHTINGS, weightingRows(parts)),
    fillMeasure(BASELINE_W, baselineRows(parts)),
    fillMeasure(ANTENNA_W, antennas.map(antennaRow)),
    fillMeasure(SNAPSHOT, snapshots.map(snapshotRow)),
    fillMeasure(RADIAL_GAP, radialRows(parts)),
    fillMeasure(AZIMUTHAL_GAP, azimuthalRows(parts)),
    fillMeasure(
      LIMIT,
      parts.limits.map((limit) => limitRow(limit, parts.plan.dynamicRange.value)),
    ),
  ];
}

const flag = (value: boolean): number => (value ? 1 : 0);

function imageRow(parts: ForecastParts, snapshots: readonly Snapshot[]): Row {
  return {
    ...wColumns(parts, snapshots),
    ...edgeColumns(parts),
    ...beamColumns(parts),
    ...limitColumns(parts),
  };
}

function wColumns(parts: ForecastParts, snapshots: readonly Snapshot[]): Row {
  const { wTerm, plan, trackW, wShift } = parts;
  const rest = snapshots.map((snapshot) => snapshot.restPhase).filter((phase) => !Number.isNaN(phase));
  return {
    w_known: flag(wTerm.known),
    w_zeroed: flag(trackW.zeroed),
    w_max_wavelengths: wTerm.largestWavelengths,
    w_phase_edge: wTerm.edgePhaseRad,
    w_loss_edge: wTerm.edgeLossFraction,
    w_shift_edge_arcsec: wShift / RADIANS_PER_ARCSEC,
    w_phase_off_plane:
      rest.length === 0 ? Number.NaN : rest.reduce((most, phase) => Math.max(most, phase), 0),
    uncorrected_field_arcsec: wTerm.uncorrectedFieldArcsec,
    uncorrected_field_ratio: plan.fieldOfView.value / (wTerm.uncorrectedFieldArcsec * RADIANS_PER_ARCSEC),
    planes: wTerm.planes,
    facets: wTerm.facets,
  };
}

function edgeColumns(parts: ForecastParts): Row {
  const { smearing, coverage: judged, unflagged } = parts;
  const { coverage } = judged;
  return {
    bandwidth_loss: smearing.bandwidthLossFraction,
    bandwidth_loss_mean: smearing.bandwidthLossMean,
    time_loss: smearing.timeLossFraction,
    time_loss_mean: smearing.timeLossMean,
    smearing_loss: smearing.loss,
    filled_fraction: coverage.filledFraction,
    radial_gap_ratio: coverage.largestRadialGapRatioFraction,
    radial_gap_from: coverage.radialGapFromWavelengths,
    radial_gap_to: coverage.radialGapToWavelengths,
    azimuthal_gap_deg: coverage.largestAzimuthalGapRad * DEGREES,
    azimuthal_gap_from: coverage.azimuthalGapFromWavelengths,
    azimuthal_gap_to: coverage.azimuthalGapToWavelengths,
    shortest_wavelengths: coverage.shortestSpacingWavelengths,
    longest_wavelengths: coverage.longestSpacingWavelengths,
    shortest_ratio: judged.shortestRatio,
    longest_ratio: judged.longestRatio,
    missing_flux: coverage.missingFluxFraction,
    unflagged_filled_fraction: unflagged.filledFraction,
    unflagged_radial_gap_ratio: unflagged.largestRadialGapRatioFraction,
    unflagged_azimuthal_gap_deg: unflagged.largestAzimuthalGapRad * DEGREES,
    unflagged_shortest_wavelengths: unflagged.shortestSpacingWavelengths,
    unflagged_longest_wavelengths: unflagged.longestSpacingWavelengths,
  };
}

function beamColumns(parts: ForecastParts): Row {
  const { planned, plan, natural, calibrated, sefd } = parts;
  const { major, minor } = planned.ellipse;
  const target = plan.targetRms.value;
  const expected = plan.expectedSefd.value;
  return {
    ...ellipseColumns(planned),
    resolution_ratio: Math.sqrt(major * minor) / plan.resolution.value,
    resolution_given: flag(plan.resolution.origin === "given"),
    noise_jy: calibrated ? planned.noise : Number.NaN,
    noise_factor: planned.noise / natural.noise,
    noise_ratio: calibrated && target !== null ? planned.noise / target : Number.NaN,
    sefd_jy: sefd,
    sefd_ratio: expected === null ? Number.NaN : sefd / expected,
  };
}

function ellipseColumns({ ellipse, sidelobes }: MadeBeam): Row {
  return {
    beam_major_arcsec: ellipse.major / RADIANS_PER_ARCSEC,
    beam_minor_arcsec: ellipse.minor / RADIANS_PER_ARCSEC,
    beam_pa_deg: ellipse.positionAngle * DEGREES,
    elongation: ellipse.major / ellipse.minor,
    peak_sidelobe: Math.abs(sidelobes.peak),
    rms_sidelobe: sidelobes.rms,
  };
}

function limitColumns({ limits, plan }: ForecastParts): Row {
  const worst = limits[0];
  const cap = worst?.dynamicRangeFraction ?? Number.NaN;
  return {
    dynamic_range_cap: cap,
    dynamic_range_ratio: worst === undefined ? 0 : plan.dynamicRange.value / cap,
    limited_by: worst?.cause ?? null,
  };
}

function weightingRows(parts: ForecastParts): Row[] {
  return parts.weightings.map(({ weighting, planned, made }) => ({
    weighting: weighting.kind,
    robust: weighting.kind === "robust" ? weighting.robust : Number.NaN,
    planned: flag(planned),
    ...ellipseColumns(made),
    noise_jy: parts.calibrated ? made.noise : Number.NaN,
    noise_factor: made.noise / parts.natural.noise,
  }));
}

function baselineRows(parts: ForecastParts): Row[] {
  return parts.baselines.map((baseline) => ({
    antenna1: baseline.antenna1,
    antenna2: baseline.antenna2,
    uv_min_wavelengths: baseline.uvMin,
    uv_max_wavelengths: baseline.uvMax,
    w_max_wavelengths: baseline.wMax,
    w_phase_edge: baseline.phase,
    w_loss_edge: baseline.loss,
    weight_fraction: baseline.weightFraction,
    shadowed: baseline.shadowed,
  }));
}

function antennaRow({ antenna, wMax, phase, loss }: AntennaW): Row {
  return { antenna, w_max_wavelengths: wMax, w_phase_edge: phase, w_loss_edge: loss };
}

function snapshotRow(snapshot: Snapshot): Row {
  return {
    time_start: snapshot.start,
    time_end: snapshot.end,
    plane_a: snapshot.a,
    plane_b: snapshot.b,
    plane_known: flag(snapshot.determined),
    plane_zenith_deg: Math.atan(Math.hypot(snapshot.a, snapshot.b)) * DEGREES,
    w_rms_m: snapshot.wRms,
    residual_rms_m: snapshot.restRms,
    residual_max_m: snapshot.restLargest,
    absorbed_fraction: snapshot.wRms > 0 ? 1 - snapshot.restRms / snapshot.wRms : Number.NaN,
    w_phase_edge: snapshot.phase,
    residual_phase_edge: snapshot.restPhase,
  };
}

function radialRows({ coverage }: ForecastParts): Row[] {
  return coverage.radial.map(({ from, to, kind }) => ({
    from_wavelengths: from,
    to_wavelengths: to,
    ratio: to / from,
    kind,
    scale_from_arcsec: 1 / to / RADIANS_PER_ARCSEC,
    scale_to_arcsec: 1 / from / RADIANS_PER_ARCSEC,
  }));
}

function azimuthalRows({ coverage }: ForecastParts): Row[] {
  return coverage.annuli.map(({ from, to, gap, at }) => ({
    from_wavelengths: from,
    to_wavelengths: to,
    gap_deg: gap * DEGREES,
    at_deg: at * DEGREES,
  }));
}

function limitRow(limit: RankedLimit, planned: number): Row {
  const { cause, dynamicRangeFraction, text, event, eventIndex } = limit;
  const scope = event?.scope;
  const antenna = scope?.antennas?.length === 1 ? scope.antennas[0]! : null;
  const [antenna1, antenna2] = scope?.baselines?.length === 1 ? scope.baselines[0]! : [null, null];
  const time: readonly [Cell, Cell] = scope?.time ?? [null, null];
  return {
    cause,
    dynamic_range: dynamicRangeFraction,
    ratio: planned / dynamicRangeFraction,
    text,
    event: eventIndex ?? Number.NaN,
    antenna,
    antenna1,
    antenna2,
    time_start: time[0],
    time_end: time[1],
  };
}
