/**
 * A calibrator: a point source at the phase centre has the same amplitude and zero phase on every baseline, so every
 * departure is evidence. It is laid at the antennas first, and what they leave at the baselines.
 */
import { EVERYTHING } from "../dataset/selection.ts";
import { type Graph, solveSums } from "../geometry/antenna-coordinates.ts";
import { antennaPhasors } from "../geometry/antenna-phases.ts";
import { fillMeasure } from "../measure/fill-measure.ts";
import type { Measure } from "../measure/table.ts";
import { formatNumber, formatPercent } from "../util/units.ts";
import type { GriddedImage } from "./cost.ts";
import { capsOf } from "./error-caps.ts";
import { gainError } from "./event-errors.ts";
import { type RankedLimit, snapshotDynamicRange } from "./limits.ts";
import { CALIBRATOR_ANTENNA, CALIBRATOR_BASELINE } from "./measure-columns.ts";
import { type Sampling, trackOffset } from "./sampling.ts";

export interface CalibratorAntenna {
  readonly antenna: number;
  readonly ratio: number;
  readonly ratioError: number;
  /** radians */
  readonly phase: number;
  readonly phaseError: number;
  /** peak over rms; NaN where the departure is within its error */
  readonly dynamicRange: number;
}

export interface CalibratorBaseline {
  readonly antenna1: number;
  readonly antenna2: number;
  readonly ratio: number;
  readonly ratioError: number;
  readonly phase: number;
  readonly phaseError: number;
}

export interface CalibratorResult {
  readonly antennas: readonly CalibratorAntenna[];
  readonly baselines: readonly CalibratorBaseline[];
}

/** A departure below this many sigmas is none. */
const SIGMAS = 3;
/** Baselines fainter than this many sigmas have no say in amplitudes. */
const FAINT = 3;
const DEGREES = 180 / Math.PI;

/** The mean of a baseline over time, channels and products, and its noise. */
interface Means {
  readonly graph: Graph;
  readonly numbers: readonly number[];
  /** (baselines) dataset unit */
  readonly real: Float64Array;
  readonly imag: Float64Array;
  readonly weight: Float64Array;
  readonly sigma: Float64Array;
}

/**
 * @param variance (baselines x subbands x channels x polarizations) weight x variance of a sample
 * @returns null where no source stands above the noise
 */
export async function judgeCalibrator(
  image: GriddedImage,
  sampling: Sampling,
  variance: Float64Array,
): Promise<CalibratorResult | null> {
  const means = meansOf(sampling, variance);
  const { graph, numbers, real, imag, weight, sigma } = means;
  const phasors = antennaPhasors(means);
  const logs = Float64Array.from(real, (re, p) => Math.log(Math.hypot(re, imag[p]!)));
  const strength = Float64Array.from(weight, (t, p) => {
    const ratio = Math.hypot(real[p]!, imag[p]!) / sigma[p]!;
    return t > 0 && ratio > FAINT ? Math.min(ratio, 1e4) ** 2 : 0;
  });
  const gains = solveSums(graph, strength, logs);
  if (gains === null || !strength.some((t) => t > 0)) return null;
  const present = numbers.map((_, i) => phasors.re[i] !== 0 || phasors.im[i] !== 0);
  const typical = median(gains.filter((_, i) => present[i]!));
  const source = Math.exp(2 * typical);
  const middle = commonPhase(phasors.re, phasors.im);
  const degree = new Float64Array(numbers.length);
  graph.first.forEach((i, p) => {
    if (!(strength[p]! > 0)) return;
    degree[i]! += 1 / sigma[p]! ** 2;
    degree[graph.second[p]!]! += 1 / sigma[p]! ** 2;
  });
  const found = numbers.flatMap((antenna, i) => {
    if (!present[i] || degree[i] === 0) return [];
    const error = 1 / (source * Math.sqrt(degree[i]!));
    const phase = wrap(Math.atan2(phasors.im[i]!, phasors.re[i]!) - middle);
    return [{ antenna, ratio: Math.exp(gains[i]! - typical), ratioError: error, phase, phaseError: error }];
  });
  const baselines = sampling.survey.baselines.flatMap(({ antenna1, antenna2 }, p) => {
    if (!(strength[p]! > 0)) return [];
    const [i, j] = [graph.first[p]!, graph.second[p]!];
    // V conj(g_i) g_j
    const gr = phasors.re[i]! * phasors.re[j]! + phasors.im[i]! * phasors.im[j]!;
    const gi = phasors.re[i]! * phasors.im[j]! - phasors.im[i]! * phasors.re[j]!;
    const phase = Math.atan2(real[p]! * gi + imag[p]! * gr, real[p]! * gr - imag[p]! * gi);
    const expected = Math.exp(gains[i]! + gains[j]!);
    const error = sigma[p]! / expected;
    const ratio = Math.exp(logs[p]!) / expected;
    return [{ antenna1, antenna2, ratio, ratioError: error, phase, phaseError: error }];
  });
  return { antennas: await withCaps(image, found), baselines };
}

async function withCaps(
  image: GriddedImage,
  antennas: readonly Omit<CalibratorAntenna, "dynamicRange">[],
): Promise<CalibratorAntenna[]> {
  const off = antennas.filter(departs);
  const caps = await capsOf(
    image,
    off.map(({ antenna, ratio, phase }) => ({
      scope: { ...EVERYTHING, antennas: [antenna] },
      error: gainError(ratio, phase),
      samples: 0,
    })),
  );
  const byAntenna = new Map(off.map(({ antenna }, i) => [antenna, caps[i]!]));
  return antennas.map((own) => ({ ...own, dynamicRange: byAntenna.get(own.antenna) ?? Number.NaN }));
}

function departs({ ratio, ratioError, phase, phaseError }: Omit<CalibratorAntenna, "dynamicRange">): boolean {
  return Math.abs(ratio - 1) > SIGMAS * ratioError || Math.abs(phase) > SIGMAS * phaseError;
}

function meansOf(sampling: Sampling, variance: Float64Array): Means {
  const { survey, products, field } = sampling;
  const { tracks, baselines, dataset } = survey;
  const { subbands, channels, polarizations } = dataset.shape;
  const numbers = [...new Set(baselines.flatMap((b) => [b.antenna1, b.antenna2]))].sort((a, b) => a - b);
  const index = new Map(numbers.map((number, i) => [number, i]));
  const real = new Float64Array(baselines.length);
  const imag = new Float64Array(baselines.length);
  const weight = new Float64Array(baselines.length);
  const noise = new Float64Array(baselines.length);
  for (let cell = 0; cell < tracks.cells; cell++) {
    if (tracks.field[cell] !== field.id) continue;
    const b = tracks.baseline[cell]!;
    for (let s = 0; s < subbands; s++) {
      for (const product of products) {
        const at = trackOffset(dataset, cell, s) + product;
        const t = tracks.weight[at]!;
        if (!(t > 0 && t < Number.POSITIVE_INFINITY && Number.isFinite(tracks.real[at]! + tracks.imag[at]!)))
          continue;
        real[b]! += t * tracks.real[at]!;
        imag[b]! += t * tracks.imag[at]!;
        weight[b]! += t;
        // Channels of a sub-band share much the same noise: its first stands for them.
        noise[b]! += t * variance[(b * subbands + s) * channels * polarizations + product]!;
      }
    }
  }
  const sigma = noise.map((sum, b) => (weight[b]! > 0 ? Math.sqrt(sum) / weight[b]! : Number.NaN));
  for (let b = 0; b < weight.length; b++) {
    if (weight[b] === 0) continue;
    real[b]! /= weight[b]!;
    imag[b]! /= weight[b]!;
  }
  return {
    graph: {
      antennas: numbers.length,
      first: Int32Array.from(baselines, ({ antenna1 }) => index.get(antenna1)!),
      second: Int32Array.from(baselines, ({ antenna2 }) => index.get(antenna2)!),
    },
    numbers,
    real,
    imag,
    weight,
    sigma,
  };
}

/** The phase that most phasors have: the direction of the sum in which those far from it count less and less. */
function commonPhase(re: Float64Array, im: Float64Array): number {
  let angle = Math.atan2(sumOf(im), sumOf(re));
  for (let round = 0; round < 30; round++) {
    let [x, y] = [0, 0];
    for (let i = 0; i < re.length; i++) {
      if (re[i] === 0 && im[i] === 0) continue;
      const weight = 1 / Math.max(1e-6, Math.abs(wrap(Math.atan2(im[i]!, re[i]!) - angle)));
      x += weight * re[i]!;
      y += weight * im[i]!;
    }
    angle = Math.atan2(y, x);
  }
  return angle;
}

function sumOf(values: Float64Array): number {
  return values.reduce((sum, value) => sum + value, 0);
}

function wrap(angle: number): number {
  return angle - 2 * Math.PI * Math.round(angle / (2 * Math.PI));
}

function median(values: Float64Array): number {
  const sorted = values.slice().sort();
  return sorted.length === 0
    ? Number.NaN
    : (sorted[(sorted.length - 1) >> 1]! + sorted[sorted.length >> 1]!) / 2;
}

/** @param planned dynamic range */
export function calibratorMeasures(result: CalibratorResult | null, planned: number): Measure[] {
  const beside = besideOthers(result?.baselines ?? []);
  const allowed = snapshotDynamicRange("baseline", result?.antennas.length ?? 0, 1) / planned;
  return [
    fillMeasure(
      CALIBRATOR_ANTENNA,
      (result?.antennas ?? []).map((own) => ({
        antenna: own.antenna,
        amplitude_ratio: own.ratio,
        amplitude_error: own.ratioError,
        phase_deg: own.phase * DEGREES,
        phase_error_deg: own.phaseError * DEGREES,
        dynamic_range: own.dynamicRange,
        dynamic_range_ratio: planned / own.dynamicRange,
      })),
    ),
    fillMeasure(
      CALIBRATOR_BASELINE,
      (result?.baselines ?? []).map((own, i) => ({
        antenna1: own.antenna1,
        antenna2: own.antenna2,
        amplitude_ratio: own.ratio,
        amplitude_error: own.ratioError,
        phase_deg: own.phase * DEGREES,
        phase_error_deg: own.phaseError * DEGREES,
        significance: significanceOf(own),
        beside: beside[i]!,
        allowed_error: allowed,
      })),
    ),
  ];
}

type BaselineDeparture = CalibratorResult["baselines"][number];

/** Departure over its error, of the larger of amplitude and phase. */
function significanceOf(own: BaselineDeparture): number {
  return Math.max(Math.abs(own.ratio - 1) / own.ratioError, Math.abs(own.phase) / own.phaseError);
}

/**
 * Significance of each baseline over the largest of those that share an antenna with it. An error of one baseline of N
 * antennas leaves 1/N of it on each of these: above 1 the error is the baseline's own.
 */
function besideOthers(baselines: readonly BaselineDeparture[]): number[] {
  const largest = new Map<number, { first: number; second: number }>();
  for (const own of baselines) {
    const significance = significanceOf(own);
    for (const antenna of [own.antenna1, own.antenna2]) {
      const seen = largest.get(antenna) ?? { first: 0, second: 0 };
      if (significance > seen.first) largest.set(antenna, { first: significance, second: seen.first });
      else if (significance > seen.second) largest.set(antenna, { ...seen, second: significance });
    }
  }
  return baselines.map((own) => {
    const significance = significanceOf(own);
    const others = [own.antenna1, own.antenna2].map((antenna) => {
      const { first, second } = largest.get(antenna)!;
      return first === significance ? second : first;
    });
    return significance / Math.max(...others);
  });
}

/** The antennas that depart, as limits. */
export function calibratorLimits(result: CalibratorResult | null): RankedLimit[] {
  return (result?.antennas ?? [])
    .filter(({ dynamicRange }) => Number.isFinite(dynamicRange))
    .map(({ antenna, ratio, phase, dynamicRange }) => ({
      event: null,
      eventIndex: null,
      cause: "calibrator-antenna",
      dynamicRangeFraction: dynamicRange,
      text:
        `antenna ${antenna} has ${formatPercent(ratio)} of the others' amplitude and a phase of ` +
        `${formatNumber(phase * DEGREES)} degrees on the calibrator: a dynamic range of ${formatNumber(dynamicRange)} until it is calibrated`,
    }));
}
