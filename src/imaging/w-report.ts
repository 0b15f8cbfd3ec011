/** w by baseline, by antenna and by snapshot, and what it does at the edge of the planned field. */

import { fitPlane, planeRest } from "../geometry/plane.ts";
import { facetsNeeded, planesNeeded, uncorrectedField, wPhase } from "../geometry/w-term.ts";
import { SECONDS_PER_DAY, SPEED_OF_LIGHT } from "../util/constants.ts";
import { RADIANS_PER_ARCSEC } from "./beams.ts";
import type { EdgeSamples } from "./edge-samples.ts";
import type { WTerm } from "./image.ts";
import { frequencyRange, type Sampling, trackOffset, trackWeight } from "./sampling.ts";
import type { WLoss } from "./w-loss.ts";

/** Phase error that an uncorrected field and a correction's planes are held to: the textbook's 0.1 rad. */
export const W_PHASE_LIMIT = 0.1;

export interface BaselineW {
  readonly antenna1: number;
  readonly antenna2: number;
  /** wavelengths; NaN where nothing is usable */
  readonly uvMin: number;
  readonly uvMax: number;
  readonly wMax: number;
  /** radians at the edge */
  readonly phase: number;
  readonly loss: number;
  /** of the natural weight */
  readonly weightFraction: number;
  /** of its integrations, those with a projected separation below the dish diameter; NaN without a diameter */
  readonly shadowed: number;
}

/**
 * @param wOf (cells of the tracks) seconds, NaN unknown
 * @param radius of the field's edge, sine of its angle
 */
export function wByBaseline(
  sampling: Sampling,
  wOf: Float64Array,
  samples: EdgeSamples,
  radius: number,
  dish: number | null,
): BaselineW[] {
  const { survey, products, field } = sampling;
  const { tracks, dataset, baselines } = survey;
  const { subbands } = dataset.shape;
  const range = frequencyRange(dataset, sampling.channelUsed);
  const coherent = coherenceByBaseline(samples, baselines.length, radius);
  return baselines.map(({ antenna1, antenna2 }, index) => {
    let [uvMin, uvMax, wMax, weight] = [Number.NaN, Number.NaN, Number.NaN, 0];
    let [cells, shadowed] = [0, 0];
    for (let cell = tracks.firstCell[index]!; cell < tracks.firstCell[index + 1]!; cell++) {
      if (tracks.field[cell] !== field.id) continue;
      const spacing = Math.hypot(tracks.u[cell]!, tracks.v[cell]!);
      let used = false;
      for (let s = 0; s < subbands; s++) {
        const part = trackWeight(tracks, trackOffset(dataset, cell, s), products);
        if (part === 0) continue;
        const at = tracks.setup[cell]! * subbands + s;
        used = true;
        weight += part;
        if (!(uvMin <= spacing * range.low[at]!)) uvMin = spacing * range.low[at]!;
        if (!(uvMax >= spacing * range.high[at]!)) uvMax = spacing * range.high[at]!;
        const w = Math.abs(wOf[cell]!) * range.high[at]!;
        if (!(wMax >= w)) wMax = w;
      }
      cells += used ? 1 : 0;
      shadowed += used && dish !== null && spacing * SPEED_OF_LIGHT < dish ? 1 : 0;
    }
    return {
      antenna1,
      antenna2,
      uvMin,
      uvMax,
      wMax,
      phase: Math.abs(wPhase(wMax, radius)),
      loss: 1 - coherent[index]!,
      weightFraction: weight / sampling.totalWeight,
      shadowed: dish === null || cells === 0 ? Number.NaN : shadowed / cells,
    };
  });
}

/** (baselines) weighted mean of the cosine of the w phase at the edge; NaN where no w is known */
function coherenceByBaseline(samples: EdgeSamples, baselines: number, radius: number): Float64Array {
  const sum = new Float64Array(baselines);
  const total = new Float64Array(baselines);
  for (let i = 0; i < samples.count; i++) {
    const b = samples.baseline[i]!;
    total[b]! += samples.natural[i]!;
    sum[b]! += samples.natural[i]! * Math.cos(wPhase(samples.w[i]!, radius));
  }
  return sum.map((value, b) => (total[b]! > 0 ? value / total[b]! : Number.NaN));
}

export interface AntennaW {
  readonly antenna: number;
  readonly wMax: number;
  readonly phase: number;
  readonly loss: number;
}

/** The largest w of an antenna's baselines, and their mean loss by weight. */
export function wByAntenna(baselines: readonly BaselineW[]): AntennaW[] {
  const byAntenna = new Map<number, BaselineW[]>();
  for (const baseline of baselines) {
    for (const antenna of [baseline.antenna1, baseline.antenna2]) {
      const own = byAntenna.get(antenna);
      if (own === undefined) byAntenna.set(antenna, [baseline]);
      else own.push(baseline);
    }
  }
  const antennas = [...byAntenna.keys()].sort((a, b) => a - b);
  return antennas.map((antenna) => {
    const own = byAntenna.get(antenna)!;
    let [wMax, phase, loss, weight] = [Number.NaN, Number.NaN, 0, 0];
    for (const b of own) {
      if (!(wMax >= b.wMax) && !Number.isNaN(b.wMax)) wMax = b.wMax;
      if (!(phase >= b.phase) && !Number.isNaN(b.phase)) phase = b.phase;
      if (Number.isNaN(b.loss)) continue;
      loss += b.loss * b.weightFraction;
      weight += b.weightFraction;
    }
    return { antenna, wMax, phase, loss: weight > 0 ? loss / weight : Number.NaN };
  });
}

export interface Snapshot {
  /** MJD */
  readonly start: number;
  readonly end: number;
  readonly a: number;
  readonly b: number;
  readonly determined: boolean;
  /** metres */
  readonly wRms: number;
  readonly restRms: number;
  readonly restLargest: number;
  /** radians at the edge: of the largest |w|, and of the largest rest */
  readonly phase: number;
  readonly restPhase: number;
}

const MOST_SNAPSHOTS = 200;

/** Cells of the tracks that belong to one moment: rows of one integration may differ by a jitter of the file's. */
export interface Moment {
  readonly start: number;
  readonly end: number;
  readonly cells: readonly number[];
}

/** At most `most` moments, evenly through the times of the field, each with its usable cells of known uvw. */
export function momentsOf(sampling: Sampling, most = MOST_SNAPSHOTS): Moment[] {
  const { survey, field } = sampling;
  const { tracks } = survey;
  const cells = Array.from(tracks.field.keys()).filter(
    (cell) =>
      tracks.field[cell] === field.id && Number.isFinite(tracks.time[cell]!) && usable(sampling, cell),
  );
  const times = Float64Array.from(cells, (cell) => tracks.time[cell]!).sort();
  const jitter = survey.integration > 0 ? (0.25 * survey.integration) / SECONDS_PER_DAY : 0;
  const starts = startsOf(times, jitter);
  const count = Math.min(most, starts.length);
  const moments = Array.from({ length: count }, (_, k) => {
    const which = Math.floor((k * starts.length) / count);
    const end = (starts[which + 1] ?? times.length) - 1;
    return { start: times[starts[which]!]!, end: times[end]!, cells: [] as number[] };
  });
  for (const cell of cells) {
    const moment = momentAt(moments, tracks.time[cell]!);
    if (moment !== undefined) moment.cells.push(cell);
  }
  return moments;
}

/** Places in ascending times at which a new moment starts: more than `jitter` days after the last one's start. */
function startsOf(times: Float64Array, jitter: number): number[] {
  const starts: number[] = [];
  for (let i = 0; i < times.length; i++) {
    if (starts.length === 0 || times[i]! - times[starts.at(-1)!]! > jitter) starts.push(i);
  }
  return starts;
}

function momentAt<M extends { readonly start: number; readonly end: number }>(
  moments: readonly M[],
  time: number,
): M | undefined {
  let low = 0;
  let high = moments.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (moments[middle]!.start <= time) low = middle + 1;
    else high = middle;
  }
  const found = moments[low - 1];
  return found !== undefined && time <= found.end ? found : undefined;
}

function usable(sampling: Sampling, cell: number): boolean {
  const { survey, products } = sampling;
  const { tracks, dataset } = survey;
  if (!Number.isFinite(tracks.u[cell]! + tracks.v[cell]!)) return false;
  for (let s = 0; s < dataset.shape.subbands; s++) {
    if (trackWeight(tracks, trackOffset(dataset, cell, s), products) > 0) return true;
  }
  return false;
}

/** Plane by plane; phases are at the highest frequency. */
export function snapshotsOf(sampling: Sampling, wOf: Float64Array, radius: number): Snapshot[] {
  const { highest } = frequencyRange(sampling.survey.dataset, sampling.channelUsed);
  const { tracks } = sampling.survey;
  return momentsOf(sampling).flatMap(({ start, end, cells }) => {
    const known = cells.filter((cell) => Number.isFinite(wOf[cell]!));
    if (known.length === 0) return [];
    const metres = (column: Float64Array) =>
      Float64Array.from(known, (cell) => column[cell]! * SPEED_OF_LIGHT);
    const u = metres(tracks.u);
    const v = metres(tracks.v);
    const w = metres(wOf);
    const weight = Float64Array.from(known, (cell) => cellWeight(sampling, cell));
    const plane = fitPlane(u, v, w, weight);
    const rest = planeRest(plane, u, v, w, weight);
    const largest = w.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
    const phaseOf = (metres: number) => Math.abs(wPhase((metres * highest) / SPEED_OF_LIGHT, radius));
    return [
      {
        start,
        end,
        ...plane,
        wRms: rest.wRms,
        restRms: rest.rms,
        restLargest: rest.largest,
        phase: phaseOf(largest),
        restPhase: phaseOf(rest.largest),
      },
    ];
  });
}

function cellWeight(sampling: Sampling, cell: number): number {
  const { survey, products } = sampling;
  let sum = 0;
  for (let s = 0; s < survey.dataset.shape.subbands; s++) {
    sum += trackWeight(survey.tracks, trackOffset(survey.dataset, cell, s), products);
  }
  return sum;
}

/** @param field full width of the planned field, radians */
export function wTermOf(baselines: readonly BaselineW[], loss: WLoss, field: number): WTerm {
  const known = baselines.filter((b) => !Number.isNaN(b.wMax));
  const largest = known.length === 0 ? Number.NaN : known.reduce((most, b) => Math.max(most, b.wMax), 0);
  const radius = Math.sin(field / 2);
  return {
    largestWavelengths: largest,
    edgePhaseRad: Math.abs(wPhase(largest, radius)),
    edgeLossFraction: loss.loss,
    uncorrectedFieldArcsec: uncorrectedField(largest, W_PHASE_LIMIT) / RADIANS_PER_ARCSEC,
    phaseLimitRad: W_PHASE_LIMIT,
    planes: planesNeeded(largest, radius, W_PHASE_LIMIT),
    facets: facetsNeeded(largest, field, W_PHASE_LIMIT),
    known: known.length > 0,
  };
}
