/** The `baseline` measure, and the facts of each baseline that other tables build on. */
import { SPEED_OF_LIGHT } from "../../util/constants.ts";
import { median, robustSigma, standardDeviation } from "../../util/statistics.ts";
import { evenChoice } from "../even-choice.ts";
import { fillMeasure } from "../fill-measure.ts";
import { BASELINE } from "../forms.ts";
import { type BareSurvey, baselinesMet } from "../survey-result.ts";
import type { Measure } from "../table.ts";
import type { BaselineCounts } from "./baseline-counts.ts";
import { parallelNumbers, parallelProducts } from "./products.ts";

/** What is known of each baseline, by its number: columns, since an array of thousands has millions of them. */
export interface BaselineFacts {
  readonly counts: BaselineCounts;
  /** medians over sub-bands, channels and parallel hands; NaN unknown */
  readonly amplitude: Float64Array;
  readonly sigma: Float64Array;
  readonly coherence: Float64Array;
  readonly scatter: Float64Array;
  readonly tail: Float64Array;
  /** amplitude of the first parallel hand over the second; NaN without two */
  readonly handRatio: Float64Array;
  /** typical noise times the square root of the typical weight of a sample */
  readonly weightScatter: Float64Array;
}

/** Integrations that tell whether a scatter has long tails. */
const FEWEST_FOR_TAIL = 10;
/** Integrations whose vector mean is held against their scalar mean. */
const COHERENCE_WINDOW = 8;

export function baselineFacts(survey: BareSurvey, counts: BaselineCounts): BaselineFacts {
  const column = () => new Float64Array(survey.baselines.length);
  const facts = {
    counts,
    amplitude: column(),
    sigma: column(),
    coherence: column(),
    scatter: column(),
    tail: column(),
    handRatio: column(),
    weightScatter: column(),
  };
  for (let baseline = 0; baseline < survey.baselines.length; baseline++) fillFacts(survey, facts, baseline);
  return facts;
}

function fillFacts(survey: BareSurvey, facts: BaselineFacts, baseline: number): void {
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
  const weight = facts.counts.meanWeight(baseline, parallelNumbers(subbands, dataset.polarizations));
  facts.amplitude[baseline] = median(ofParallel(levels.median));
  facts.sigma[baseline] = sigma;
  facts.coherence[baseline] = inTime.coherence;
  facts.scatter[baseline] = inTime.scatter;
  facts.tail[baseline] = inTime.tail;
  facts.handRatio[baseline] = hands.length === 2 ? ofHand(hands[0]!) / ofHand(hands[1]!) : Number.NaN;
  facts.weightScatter[baseline] = sigma * Math.sqrt(weight);
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
function flaggedByAntenna(survey: BareSurvey, flagged: Float64Array): Map<number, number> {
  const fractions = new Map<number, number[]>();
  for (const [b, { antenna1, antenna2 }] of survey.baselines.entries()) {
    for (const antenna of [antenna1, antenna2]) {
      const known = fractions.get(antenna);
      if (known === undefined) fractions.set(antenna, [flagged[b]!]);
      else known.push(flagged[b]!);
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

export function baselineMeasure(survey: BareSurvey, facts: BaselineFacts): Measure {
  const { baselines, tracks } = survey;
  const flagged = Float64Array.from(baselines, (_, b) => facts.counts.of(b).flaggedFraction);
  const ofAntenna = flaggedByAntenna(survey, flagged);
  const beyond = (b: number) => {
    const { antenna1, antenna2 } = baselines[b]!;
    return flagged[b]! - Math.max(ofAntenna.get(antenna1)!, ofAntenna.get(antenna2)!);
  };
  const highest = highestFrequency(survey);
  const typicalSigma = median(facts.sigma);
  const typicalWeightScatter = median(facts.weightScatter);
  const chosen = evenChoice(baselines);
  const rows = Array.from(chosen, (b) => {
    const { uvMin, uvMax, wMax } = spacings(survey, tracks.firstCell[b]!, tracks.firstCell[b + 1]!);
    return {
      antenna1: baselines[b]!.antenna1,
      antenna2: baselines[b]!.antenna2,
      ...facts.counts.of(b).row,
      flagged_beyond_antennas: beyond(b),
      uv_min_m: uvMin,
      uv_max_m: uvMax,
      w_max_m: wMax,
      w_max_wavelengths: (wMax * highest) / SPEED_OF_LIGHT,
      amplitude_median: facts.amplitude[b]!,
      noise_sigma: facts.sigma[b]!,
      noise_ratio: facts.sigma[b]! / typicalSigma,
      amplitude_scatter: facts.scatter[b]!,
      amplitude_tail: facts.tail[b]!,
      coherence: facts.coherence[b]!,
      weight_scatter_ratio: facts.weightScatter[b]! / typicalWeightScatter,
    };
  });
  const measure = fillMeasure(BASELINE, rows);
  const all = baselinesMet(survey);
  if (chosen.length === all) return measure;
  return {
    ...measure,
    title: `${measure.title}: an even choice of ${chosen.length} of ${all}`,
  };
}
