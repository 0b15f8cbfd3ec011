/** The geometry of the survey's tracks judged, and what its measures say. */

import { type ArrayHeights, arrayHeights, type PlaneMoment } from "../geometry/array-plane.ts";
import type { GeometryJudgement } from "../geometry/geometry-faults.ts";
import { type Judged, judgeGeometry, uvwPredictor } from "../geometry/judge-geometry.ts";
import type { PhaseOffset } from "../geometry/phase-positions.ts";
import { siderealTimeOf } from "../geometry/sidereal.ts";
import { hourAngle } from "../geometry/uvw.ts";
import { wPhase } from "../geometry/w-term.ts";
import { fillMeasure, type Row } from "../measure/fill-measure.ts";
import type { Measure } from "../measure/table.ts";
import { SPEED_OF_LIGHT } from "../util/constants.ts";
import { ANTENNA_GEOMETRY, BASELINE_GEOMETRY, GEOMETRY } from "./measure-columns.ts";
import { phasePositions } from "./phase-report.ts";
import { frequencyRange, type Sampling } from "./sampling.ts";
import { momentsOf } from "./w-report.ts";

/** Moments are enough for a plane of the array. */
const PLANE_MOMENTS = 24;
/** An antenna is on a ridge when it is this many times as far off the plane as the others. */
const RIDGE = 5;
/** Cells of the tracks that are compared with the tables: more change nothing. */
const MOST_CELLS = 50_000;
const DEGREES = 180 / Math.PI;

export interface GeometryReport {
  readonly judged: Judged;
  /** by antenna number, metres off the plane of the others; empty when there is no plane */
  readonly heights: ReadonlyMap<number, number>;
  readonly ridge: { readonly antenna: number; readonly height: number } | null;
  readonly plane: ArrayHeights | null;
  /** by antenna number */
  readonly phases: ReadonlyMap<number, PhaseOffset>;
}

export function judgeTracks(sampling: Sampling): GeometryReport {
  const { survey, field } = sampling;
  const { tracks, baselines, dataset } = survey;
  const cells = thinned(Array.from(tracks.field.keys()).filter((cell) => tracks.field[cell] === field.id));
  const samples = {
    antenna1: cells.map((cell) => baselines[tracks.baseline[cell]!]!.antenna1),
    antenna2: cells.map((cell) => baselines[tracks.baseline[cell]!]!.antenna2),
    time: cells.map((cell) => tracks.time[cell]!),
    u: cells.map((cell) => tracks.u[cell]!),
    v: cells.map((cell) => tracks.v[cell]!),
    w: cells.map((cell) => tracks.w[cell]!),
  };
  const judged = judgeGeometry(dataset.array, field, samples, sampling.meanFrequency);
  return { judged, ...planeOf(sampling, judged), phases: phasePositions(sampling) };
}

/** Every so many of the cells, at places that follow no period of theirs. */
function thinned(cells: readonly number[]): readonly number[] {
  const stride = cells.length / MOST_CELLS;
  if (stride <= 1) return cells;
  return Array.from({ length: MOST_CELLS }, (_, k) => {
    const jitter = (k * 0.6180339887498949) % 1;
    return cells[Math.min(cells.length - 1, Math.floor((k + jitter) * stride))]!;
  });
}

/** The antennas off the plane of the others, by the u, v, w of the file. */
function planeOf(sampling: Sampling, judged: Judged): Omit<GeometryReport, "judged" | "phases"> {
  const { survey, field } = sampling;
  const { tracks, baselines, dataset } = survey;
  const numbers = [...new Set(baselines.flatMap((b) => [b.antenna1, b.antenna2]))].sort((a, b) => a - b);
  const index = new Map(numbers.map((number, i) => [number, i]));
  const result = judged.judged ? judged.result : null;
  const sign = result?.signReversed === true ? -1 : 1;
  const scale = (sign * SPEED_OF_LIGHT) / (result?.orientation.fit.scale ?? 1);
  const turn = result?.orientation.fit.turn ?? 0;
  const moments = momentsOf(sampling, PLANE_MOMENTS).map(({ start, cells }): PlaneMoment => {
    const known = cells.filter((cell) => Number.isFinite(tracks.w[cell]!));
    const metres = (column: Float64Array) => Float64Array.from(known, (cell) => column[cell]! * scale);
    return {
      graph: {
        antennas: numbers.length,
        first: Int32Array.from(known, (cell) => index.get(baselines[tracks.baseline[cell]!]!.antenna1)!),
        second: Int32Array.from(known, (cell) => index.get(baselines[tracks.baseline[cell]!]!.antenna2)!),
      },
      u: metres(tracks.u),
      v: metres(tracks.v),
      w: metres(tracks.w),
      hourAngle: turn + hourAngle(siderealTimeOf(dataset.array, start), field.rightAscension),
    };
  });
  const plane = arrayHeights(numbers.length, moments, field.declination);
  const heights = new Map<number, number>();
  if (plane !== null) {
    numbers.forEach((number, i) => {
      if (Number.isFinite(plane.heights[i]!)) heights.set(number, plane.heights[i]!);
    });
  }
  return { plane, heights, ridge: ridgeOf(heights) };
}

function ridgeOf(heights: ReadonlyMap<number, number>): GeometryReport["ridge"] {
  const sorted = [...heights].sort((a, b) => Math.abs(b[1]) - Math.abs(a[1]) || a[0] - b[0]);
  const first = sorted[0];
  if (first === undefined) return null;
  const middle = sorted[sorted.length >> 1]!;
  const [antenna, height] = first;
  // Millimetres are what u, v, w are written to.
  return Math.abs(height) > RIDGE * Math.abs(middle[1]) && Math.abs(height) > 0.01
    ? { antenna, height }
    : null;
}

/** (cells of the tracks) w in seconds from the antenna positions, NaN where unknown; null when not judged. */
export function expectedW(sampling: Sampling, judged: Judged): Float64Array | null {
  if (!judged.judged) return null;
  const { survey, field } = sampling;
  const { tracks, baselines, dataset } = survey;
  const predict = uvwPredictor(
    dataset.array,
    field,
    judged.result.orientation,
    survey.times[0] ?? Number.NaN,
  );
  const out = new Float64Array(3);
  return Float64Array.from({ length: tracks.cells }, (_, cell) => {
    const { antenna1, antenna2 } = baselines[tracks.baseline[cell]!]!;
    return predict(antenna1, antenna2, tracks.time[cell]!, out) ? out[2]! / SPEED_OF_LIGHT : Number.NaN;
  });
}

/** @param radius of the field's edge, sine of its angle */
export function geometryMeasures(sampling: Sampling, report: GeometryReport, radius: number): Measure[] {
  const { judged } = report;
  const baselines = judged.judged ? judged.result.baselines : [];
  return [
    fillMeasure(GEOMETRY, [{ ...judgementRow(judged), ...planeRow(report) }]),
    fillMeasure(ANTENNA_GEOMETRY, antennaRows(sampling, report, radius)),
    fillMeasure(
      BASELINE_GEOMETRY,
      baselines.map(({ antenna1, antenna2, relativeRms, reversed }) => ({
        antenna1,
        antenna2,
        relative_rms: relativeRms,
        reversed: reversed ? 1 : 0,
      })),
    ),
  ];
}

function judgementRow(judged: Judged): Row {
  const result = judged.judged ? judged.result : null;
  const off = result?.offAntenna ?? null;
  return {
    judged: result === null ? 0 : 1,
    why_not: judged.judged ? null : judged.why,
    relative_rms: result?.relativeRms ?? Number.NaN,
    repaired_rms: result?.repairedRms ?? Number.NaN,
    fault: result?.fault ?? null,
    fault_text: result?.faultText ?? null,
    axis_fault: result?.axisFault ?? null,
    unit_fault: result?.unitFault ?? null,
    scale: result?.orientation.fit.scale ?? Number.NaN,
    sign_reversed: result?.signReversed === true ? 1 : 0,
    rotation_deg: (result?.rotation ?? Number.NaN) * DEGREES,
    hour_angle_offset_deg: result?.turnKnown === true ? result.orientation.fit.turn * DEGREES : Number.NaN,
    frame: result === null ? null : frameOf(result),
    convention: result?.orientation.convention ?? null,
    reversed_baselines: result?.reversed.length ?? Number.NaN,
    off_antenna: off,
    off_antenna_m: off === null ? Number.NaN : result!.offsets.get(off)!.distance,
  };
}

function frameOf({ orientation, turnKnown }: GeometryJudgement): string {
  if (orientation.mirrored) return "mirrored";
  return turnKnown && orientation.fit.turn === 0 ? "geocentric" : "local";
}

function planeRow({ ridge, plane }: GeometryReport): Row {
  return {
    ridge_antenna: ridge?.antenna ?? null,
    ridge_height_m: ridge?.height ?? Number.NaN,
    coplanar_hour_angle_deg: (plane?.hourAngle ?? Number.NaN) * DEGREES,
    coplanar_declination_deg: (plane?.declination ?? Number.NaN) * DEGREES,
  };
}

function antennaRows(sampling: Sampling, report: GeometryReport, radius: number): Row[] {
  const { survey } = sampling;
  const { highest } = frequencyRange(survey.dataset, sampling.channelUsed);
  const offsets = report.judged.judged ? report.judged.result.offsets : new Map<number, never>();
  const known = [offsets, report.heights, report.phases].flatMap((map) => [...map.keys()]);
  const numbers = [...new Set(known)].sort((a, b) => a - b);
  const wavelengths = (metres: number) => (metres * highest) / SPEED_OF_LIGHT;
  return numbers.map((antenna) => {
    const offset = offsets.get(antenna);
    const height = report.heights.get(antenna) ?? Number.NaN;
    const distance = offset?.distance ?? Number.NaN;
    return {
      antenna,
      offset_m: distance,
      offset_x_m: offset?.offset[0] ?? Number.NaN,
      offset_y_m: offset?.offset[1] ?? Number.NaN,
      offset_z_m: offset?.offset[2] ?? Number.NaN,
      offset_wavelengths: wavelengths(distance),
      offset_phase_edge: 2 * Math.PI * wavelengths(distance) * radius,
      significance: offset?.significance ?? Number.NaN,
      phase_offset_m: report.phases.get(antenna)?.offset ?? Number.NaN,
      phase_offset_error_m: report.phases.get(antenna)?.error ?? Number.NaN,
      height_m: height,
      height_wavelengths: wavelengths(height),
      height_phase_edge: Math.abs(wPhase(wavelengths(height), radius)),
    };
  });
}
