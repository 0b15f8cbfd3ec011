/**
 * Channel averages of the parallel hands laid out by integration and baseline, with the noise of each: what the
 * detectors of antenna faults work on.
 */

import type { Polarization } from "../../dataset/dataset.ts";
import type { Survey } from "../../measure/survey-result.ts";
import { parallelProducts } from "../../measure/tables/products.ts";
import { SECONDS_PER_DAY } from "../../util/constants.ts";
import { median } from "../../util/statistics.ts";

/** One product of one sub-band: channel averages, (times x baselines), baseline fastest. */
export interface Plane {
  readonly subband: number;
  /** index into Dataset.polarizations */
  readonly product: number;
  readonly polarization: Polarization;
  /** NaN where nothing is usable */
  readonly real: Float32Array;
  readonly imag: Float32Array;
  /** variance of the real (or imaginary) part by noise; NaN with `real` */
  readonly variance: Float32Array;
  readonly slopeReal: Float32Array;
  readonly slopeImag: Float32Array;
  /** usable samples */
  readonly usable: Uint32Array;
}

export interface Grid {
  readonly survey: Survey;
  /** MJD, ascending */
  readonly times: Float64Array;
  readonly baselines: number;
  /** (times x baselines) cell of the Tracks, -1 where there is none */
  readonly cellOf: Int32Array;
  /** numbers of the antennas of the baselines, ascending */
  readonly antennas: readonly number[];
  /** (baselines) index into `antennas` */
  readonly first: Int32Array;
  readonly second: Int32Array;
  /** by antenna, its baselines */
  readonly touching: readonly (readonly number[])[];
  /** runs of integrations [start, end) of one scan */
  readonly segments: readonly Segment[];
  readonly planes: readonly Plane[];
}

export interface Segment {
  readonly start: number;
  readonly end: number;
  readonly field: number;
}

/** Of a cell's samples: where more stands out, it may be the antenna that changed rather than interference. */
const LEAST_LEFT = 0.5;

/** Integration centres closer than this are the same: the time of a row is written to a few milliseconds. */
const SAME_TIME = 0.02 / SECONDS_PER_DAY;

/** Channel averages without interference, (cells x subbands x polarizations); NaN where the survey's own are to stand. */
export interface Cleaned {
  readonly real: Float32Array;
  readonly imag: Float32Array;
  /** mean over channels of V(c+1) V*(c) */
  readonly slopeReal: Float32Array;
  readonly slopeImag: Float32Array;
  /** samples that the mean rests on */
  readonly count: Float32Array;
  /** 1 where neither these nor the survey's own tell anything; absent or null: nowhere */
  readonly spoilt?: Uint8Array | null;
}

export function gridOf(survey: Survey, cleaned: Cleaned | null = null): Grid {
  const { tracks, baselines } = survey;
  const times = timesOf(survey);
  const cellOf = new Int32Array(times.length * baselines.length).fill(-1);
  for (let cell = 0; cell < tracks.cells; cell++) {
    const t = nearest(times, tracks.time[cell]!);
    if (t >= 0) cellOf[t * baselines.length + tracks.baseline[cell]!] = cell;
  }
  const antennas = [...new Set(baselines.flatMap(({ antenna1, antenna2 }) => [antenna1, antenna2]))].sort(
    (a, b) => a - b,
  );
  const place = new Map(antennas.map((antenna, i) => [antenna, i]));
  const first = Int32Array.from(baselines, ({ antenna1 }) => place.get(antenna1)!);
  const second = Int32Array.from(baselines, ({ antenna2 }) => place.get(antenna2)!);
  const touching: number[][] = antennas.map(() => []);
  for (let b = 0; b < baselines.length; b++) {
    touching[first[b]!]!.push(b);
    touching[second[b]!]!.push(b);
  }
  const bare = { survey, times, baselines: baselines.length, cellOf, antennas, first, second, touching };
  return {
    ...bare,
    segments: segmentsOf(survey, times, cellOf),
    planes: planesOf(survey, cleaned, times, cellOf),
  };
}

function timesOf({ tracks }: Survey): Float64Array {
  const sorted = tracks.time
    .slice()
    .filter((time) => !Number.isNaN(time))
    .sort();
  const times: number[] = [];
  for (const time of sorted) {
    if (times.length === 0 || time - times[times.length - 1]! > SAME_TIME) times.push(time);
  }
  return Float64Array.from(times);
}

function nearest(times: Float64Array, time: number): number {
  if (Number.isNaN(time)) return -1;
  let low = 0;
  let high = times.length - 1;
  while (low < high) {
    const middle = (low + high + 1) >> 1;
    if (times[middle]! <= time) low = middle;
    else high = middle - 1;
  }
  return low;
}

function segmentsOf({ tracks, baselines }: Survey, times: Float64Array, cellOf: Int32Array): Segment[] {
  const segments: Segment[] = [];
  let start = 0;
  let scan = -1;
  let field = -1;
  for (let t = 0; t <= times.length; t++) {
    let cell = -1;
    for (let b = 0; t < times.length && b < baselines.length && cell < 0; b++) {
      cell = cellOf[t * baselines.length + b]!;
    }
    if (t < times.length && (cell < 0 || tracks.scan[cell] === scan)) continue;
    if (t > start) segments.push({ start, end: t, field });
    if (t === times.length) break;
    start = t;
    scan = tracks.scan[cell]!;
    field = tracks.field[cell]!;
  }
  return segments;
}

function planesOf(survey: Survey, cleaned: Cleaned | null, times: Float64Array, cellOf: Int32Array): Plane[] {
  const { dataset, baselines } = survey;
  const { subbands, polarizations } = dataset.shape;
  const parallel = parallelProducts(dataset.polarizations);
  const planes: Plane[] = [];
  for (let subband = 0; subband < subbands; subband++) {
    for (let product = 0; product < polarizations; product++) {
      if (!parallel[product]) continue;
      const plane = planeOf(survey, cleaned, times.length * baselines.length, cellOf, subband, product);
      if (plane !== null) planes.push(plane);
    }
  }
  return planes;
}

/** @returns null where nothing is usable */
export function planeOf(
  survey: Survey,
  cleaned: Cleaned | null,
  size: number,
  cellOf: Int32Array,
  subband: number,
  product: number,
): Plane | null {
  const { dataset, tracks, baselines } = survey;
  const { subbands, polarizations } = dataset.shape;
  const sigma = baselines.map((_, b) => sampleSigma(survey, b, subband, product));
  const typical = median(sigma);
  const column = () => new Float32Array(size).fill(Number.NaN);
  const plane: Plane = {
    subband,
    product,
    polarization: dataset.polarizations[product]!,
    real: column(),
    imag: column(),
    variance: column(),
    slopeReal: column(),
    slopeImag: column(),
    usable: new Uint32Array(size),
  };
  let any = false;
  for (let i = 0; i < size; i++) {
    const cell = cellOf[i]!;
    if (cell < 0) continue;
    const at = (cell * subbands + subband) * polarizations + product;
    const usable = tracks.usable[at]!;
    if (usable === 0) continue;
    any = true;
    if (cleaned?.spoilt?.[at] === 1) continue;
    const own = sigma[i % baselines.length]!;
    const noise = own > 0 ? own : typical;
    const count = cleaned?.count[at] ?? 0;
    if (
      cleaned !== null &&
      count > LEAST_LEFT * usable &&
      Number.isFinite(cleaned.real[at]! + cleaned.imag[at]!)
    ) {
      const pairs = Math.max(0, count - 1);
      plane.real[i] = cleaned.real[at]!;
      plane.imag[i] = cleaned.imag[at]!;
      plane.variance[i] = (noise * noise) / count;
      plane.slopeReal[i] = cleaned.slopeReal[at]! * pairs;
      plane.slopeImag[i] = cleaned.slopeImag[at]! * pairs;
      plane.usable[i] = Math.round(count);
      continue;
    }
    plane.real[i] = tracks.real[at]!;
    plane.imag[i] = tracks.imag[at]!;
    plane.variance[i] = (noise * noise) / usable;
    plane.slopeReal[i] = tracks.slopeReal[at]!;
    plane.slopeImag[i] = tracks.slopeImag[at]!;
    plane.usable[i] = usable;
  }
  return any ? plane : null;
}

/** Median noise of one sample over the channels, NaN unknown. */
export function sampleSigma(
  { dataset, levels }: Pick<Survey, "dataset" | "levels">,
  baseline: number,
  subband: number,
  product: number,
): number {
  const { subbands, channels, polarizations } = dataset.shape;
  const values: number[] = [];
  for (let c = 0; c < channels; c++) {
    const value = levels.sigma[((baseline * subbands + subband) * channels + c) * polarizations + product]!;
    if (value > 0) values.push(value);
  }
  return median(values);
}
