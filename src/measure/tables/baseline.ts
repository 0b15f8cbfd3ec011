/** The `baseline` measure, and the facts of each baseline that other tables build on. */
import { SPEED_OF_LIGHT } from "../../util/constants.ts";
import { median, robustSigma, standardDeviation } from "../../util/statistics.ts";
import { fillMeasure } from "../fill-measure.ts";
import { BASELINE } from "../forms.ts";
import type { BareSurvey } from "../survey-result.ts";
import type { Measure } from "../table.ts";
import type { BaselineCounts } from "./baseline-counts.ts";
import type { Counts } from "./counts.ts";
import { parallelNumbers, parallelProducts } from "./products.ts";

export interface BaselineFacts {
  readonly counts: Counts;
  /** medians over sub-bands, channels and parallel hands; NaN unknown */
  readonly amplitude: number;
  readonly sigma: number;
  readonly coherence: number;
  readonly scatter: number;
  readonly tail: number;
  /** amplitude of the first parallel hand over the second; NaN without two */
  readonly handRatio: number;
  /** typical noise times the square root of the typical weight of a sample */
  readonly weightScatter: number;
  readonly uvMin: number;
  readonly uvMax: number;
  readonly wMax: number;
}

/** Integrations that tell whether a scatter has long tails. */
const FEWEST_FOR_TAIL = 10;
/** Integrations whose vector mean is held against their scalar mean. */
const COHERENCE_WINDOW = 8;

/** By number of the baseline. */
export function baselineFacts(survey: BareSurvey, counts: BaselineCounts): BaselineFacts[] {
  return survey.baselines.map((_, baseline) => factsOf(survey, counts, baseline));
}

function factsOf(survey: BareSurvey, counts: BaselineCounts, baseline: number): BaselineFacts {
  const { tracks, levels, dataset } = survey;
  const { subbands, channels, polarizations } = dataset.shape;
  const products = subbands * polarizations;
  const each = products * channels;
  const parallel = parallelProducts(dataset.polarizations);
  const [first, last] = [tracks.firstCell[baseline]!, tracks.firstCell[baseline + 1]!];
  const own = (values: Float32Array) => values.subarray(baseline * each, (baseline + 1) * each);
  const ofParallel = (values: Float32Array) => own(values).filter((_, i) => parallel[i % polarizations]);
  const ofHand = (hand: number) => median(own(levels.median).filter((_, i) => i % polarizations === hand));
  const hands = parallel.flatMap((isParallel, p) => (isParallel ? [p] : []));
  const sigma = median(ofParallel(levels.sigma));
  const inTime = timeFacts(survey, first, last, parallel);
  return {
    counts: counts.of(baseline),
    amplitude: median(ofParallel(levels.median)),
    sigma,
    coherence: inTime.coherence,
    scatter: inTime.scatter,
    tail: inTime.tail,
    handRatio: hands.length === 2 ? ofHand(hands[0]!) / ofHand(hands[1]!) : Number.NaN,
    weightScatter:
      sigma * Math.sqrt(counts.meanWeight(baseline, parallelNumbers(subbands, dataset.polarizations))),
    ...spacings(survey, first, last),
  };
}

/** What the series of channel averages in time says, median over its parallel-hand products. */
function timeFacts(survey: BareSurvey, first: number, last: number, parallel: readonly boolean[]) {
  const { tracks, dataset } = survey;
  const { subbands, polarizations } = dataset.shape;
  const products = subbands * polarizations;
  const coherence: number[] = [];
  const scatter: number[] = [];
  const tail: number[] = [];
  for (let k = 0; k < products; k++) {
    if (!parallel[k % polarizations]) continue;
    const amplitudes: number[] = [];
    for (let cell = first; cell < last; cell++) {
      const i = cell * products + k;
      if (tracks.usable[i] === 0) continue;
      amplitudes.push(tracks.amplitude[i]!);
    }
    const sigma = robustSigma(amplitudes);
    scatter.push(sigma / median(amplitudes));
    // A sample of two has no scatter to speak of, and three no tail.
    tail.push(amplitudes.length < FEWEST_FOR_TAIL ? Number.NaN : standardDeviation(amplitudes) / sigma);
    coherence.push(coherenceOf(survey, first, last, k, products));
  }
  return { coherence: median(coherence), scatter: median(scatter), tail: median(tail) };
}

function coherenceOf(
  survey: BareSurvey,
  first: number,
  last: number,
  product: number,
  products: number,
): number {
  const { tracks } = survey;
  const windows: number[] = [];
  let [re, im, scalar, count] = [0, 0, 0, 0];
  for (let cell = first; cell < last; cell++) {
    const i = cell * products + product;
    if (count > 0 && tracks.scan[cell] !== tracks.scan[cell - 1]) [re, im, scalar, count] = [0, 0, 0, 0];
    if (tracks.usable[i] === 0) continue;
    re += tracks.real[i]!;
    im += tracks.imag[i]!;
    scalar += Math.hypot(tracks.real[i]!, tracks.imag[i]!);
    count += 1;
    if (count < COHERENCE_WINDOW) continue;
    windows.push(Math.hypot(re, im) / scalar);
    [re, im, scalar, count] = [0, 0, 0, 0];
  }
  return median(windows);
}

function spacings(survey: BareSurvey, first: number, last: number) {
  const { u, v, w } = survey.tracks;
  let [uvMin, uvMax, wMax] = [Number.NaN, Number.NaN, Number.NaN];
  for (let cell = first; cell < last; cell++) {
    const uv = Math.hypot(u[cell]!, v[cell]!) * SPEED_OF_LIGHT;
    const height = Math.abs(w[cell]!) * SPEED_OF_LIGHT;
    if (!(uv >= uvMin)) uvMin = Number.isNaN(uv) ? uvMin : uv;
    if (!(uv <= uvMax)) uvMax = Number.isNaN(uv) ? uvMax : uv;
    if (!(height <= wMax)) wMax = Number.isNaN(height) ? wMax : height;
  }
  return { uvMin, uvMax, wMax };
}

/** By antenna, the median flagged fraction of its baselines. */
function flaggedByAntenna(survey: BareSurvey, facts: readonly BaselineFacts[]): Map<number, number> {
  const fractions = new Map<number, number[]>();
  for (const [b, { antenna1, antenna2 }] of survey.baselines.entries()) {
    for (const antenna of [antenna1, antenna2]) {
      const known = fractions.get(antenna);
      const fraction = facts[b]!.counts.flaggedFraction;
      if (known === undefined) fractions.set(antenna, [fraction]);
      else known.push(fraction);
    }
  }
  return new Map([...fractions].map(([antenna, list]) => [antenna, median(list)]));
}

/** Of the channels of all setups, Hz; NaN without any. */
function highestFrequency({ dataset }: BareSurvey): number {
  let highest = Number.NaN;
  for (const { frequencies } of dataset.setups) {
    for (const frequency of frequencies) if (!(frequency <= highest)) highest = frequency;
  }
  return highest;
}

export function baselineMeasure(survey: BareSurvey, facts: readonly BaselineFacts[]): Measure {
  const ofAntenna = flaggedByAntenna(survey, facts);
  const highest = highestFrequency(survey);
  const typicalSigma = median(facts.map(({ sigma }) => sigma));
  const typicalWeightScatter = median(facts.map(({ weightScatter }) => weightScatter));
  const rows = facts.map((fact, b) => ({
    antenna1: survey.baselines[b]!.antenna1,
    antenna2: survey.baselines[b]!.antenna2,
    ...fact.counts.row,
    flagged_beyond_antennas:
      fact.counts.flaggedFraction -
      Math.max(ofAntenna.get(survey.baselines[b]!.antenna1)!, ofAntenna.get(survey.baselines[b]!.antenna2)!),
    uv_min_m: fact.uvMin,
    uv_max_m: fact.uvMax,
    w_max_m: fact.wMax,
    w_max_wavelengths: (fact.wMax * highest) / SPEED_OF_LIGHT,
    amplitude_median: fact.amplitude,
    noise_sigma: fact.sigma,
    noise_ratio: fact.sigma / typicalSigma,
    amplitude_scatter: fact.scatter,
    amplitude_tail: fact.tail,
    coherence: fact.coherence,
    weight_scatter_ratio: fact.weightScatter / typicalWeightScatter,
  }));
  return fillMeasure(BASELINE, rows);
}
