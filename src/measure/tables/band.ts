/** The measures along the band: `channel`, `subband` and `polarization`. */

import { median } from "../../util/statistics.ts";
import type { ChannelCounts } from "../channel-counts.ts";
import { runningMedian } from "../channel-noise.ts";
import { fillMeasure, type Row } from "../fill-measure.ts";
import { CHANNEL, POLARIZATION, SUBBAND } from "../forms.ts";
import type { Gleanings } from "../gleanings.ts";
import { BAD, FLAGGED, USABLE, ZERO } from "../prepared.ts";
import type { BareSurvey } from "../survey-result.ts";
import type { Measure } from "../table.ts";
import { Counts } from "./counts.ts";
import { parallelProducts } from "./products.ts";

/** Channels on either side that the running median of the amplitude looks at. */
const AROUND = 8;
/** Baselines whose levels make the medians of the whole array; more would not change them and cost time. */
const MOST_BASELINES = 2000;

/** Numbers of the array as a whole, (subbands x channels x polarizations). */
class Band {
  readonly channels: number;
  readonly polarizations: number;
  readonly parallel: readonly boolean[];
  private readonly counted: ChannelCounts;
  /** medians over the baselines */
  readonly amplitude: Float64Array;
  readonly sigma: Float64Array;

  constructor(survey: BareSurvey, { channels }: Gleanings) {
    const { shape, polarizations } = survey.dataset;
    this.channels = shape.channels;
    this.polarizations = shape.polarizations;
    this.parallel = parallelProducts(polarizations);
    this.counted = channels;
    this.amplitude = overBaselines(survey, survey.levels.median);
    this.sigma = overBaselines(survey, survey.levels.sigma);
  }

  /** @param samples  numbers of samples of a row */
  counts(samples: readonly number[]): Counts {
    const counts = new Counts();
    for (const at of samples) {
      counts.usable += this.counted.of(USABLE, at);
      counts.flagged += this.counted.of(FLAGGED, at);
      counts.bad += this.counted.of(BAD, at);
      counts.zero += this.counted.of(ZERO, at);
    }
    return counts;
  }

  /** Median of the parallel hands among the samples. */
  level(values: Float64Array, samples: readonly number[]): number {
    return median(samples.filter((at) => this.parallel[at % this.polarizations]).map((at) => values[at]!));
  }

  /** Samples of a sub-band's channels from `first` up to, not including, `end`. */
  samples(subband: number, first: number, end: number): number[] {
    const from = (subband * this.channels + first) * this.polarizations;
    return Array.from({ length: (end - first) * this.polarizations }, (_, i) => from + i);
  }
}

function overBaselines(survey: BareSurvey, values: Float32Array): Float64Array {
  const { subbands, channels, polarizations } = survey.dataset.shape;
  const each = subbands * channels * polarizations;
  const baselines = survey.baselines.length;
  const stride = Math.max(1, Math.ceil(baselines / MOST_BASELINES));
  const picked = new Float64Array(Math.ceil(baselines / stride));
  return Float64Array.from({ length: each }, (_, at) => {
    for (let i = 0; i < picked.length; i++) picked[i] = values[i * stride * each + at]!;
    return median(picked);
  });
}

/** The columns of counts and levels. */
function row(band: Band, samples: readonly number[], noiseRatio: number): Row {
  return {
    ...band.counts(samples).row,
    amplitude_median: band.level(band.amplitude, samples),
    noise_sigma: band.level(band.sigma, samples),
    noise_ratio: noiseRatio,
  };
}

export function channelMeasure(survey: BareSurvey, gleanings: Gleanings): Measure {
  const { shape, setups } = survey.dataset;
  const { subbands, channels } = shape;
  const band = new Band(survey, gleanings);
  const rows: Row[] = [];
  for (let s = 0; s < subbands; s++) {
    const samples = Array.from({ length: channels }, (_, c) => band.samples(s, c, c + 1));
    const amplitude = Float64Array.from(samples, (own) => band.level(band.amplitude, own));
    const around = runningMedian(amplitude, AROUND);
    const noise = noiseOfChannels(band, gleanings, s);
    for (let c = 0; c < channels; c++) {
      const columns = row(band, samples[c]!, noise[c]!);
      rows.push({
        subband: s,
        channel: c,
        frequency_hz: setups[0]?.frequencies[s * channels + c] ?? Number.NaN,
        ...columns,
        // What was measured, where the levels hold what is likely of noise alone.
        noise_sigma: band.level(band.sigma, band.samples(s, 0, channels)) * noise[c]!,
        amplitude_ratio: amplitude[c]! / around[c]!,
      });
    }
  }
  const typicalFlagged = median(rows.map(({ flagged_fraction }) => flagged_fraction as number));
  return fillMeasure(
    CHANNEL,
    rows.map((one) => ({
      ...one,
      flagged_beyond_typical: (one.flagged_fraction as number) - typicalFlagged,
    })),
  );
}

/** (channels) noise over the typical one of the sub-band, median of its parallel hands. */
function noiseOfChannels(band: Band, { channelNoise }: Gleanings, subband: number): Float64Array {
  const hands = channelNoise
    .slice(subband * band.polarizations, (subband + 1) * band.polarizations)
    .filter((_, p) => band.parallel[p]);
  return Float64Array.from({ length: band.channels }, (_, c) => median(hands.map(({ own }) => own[c]!)));
}

export function subbandMeasure(survey: BareSurvey, gleanings: Gleanings): Measure {
  const { subbands, channels } = survey.dataset.shape;
  const band = new Band(survey, gleanings);
  const samples = Array.from({ length: subbands }, (_, s) => band.samples(s, 0, channels));
  const sigmas = samples.map((own) => band.level(band.sigma, own));
  const typical = median(sigmas);
  return fillMeasure(
    SUBBAND,
    samples.map((own, subband) => ({ subband, ...row(band, own, sigmas[subband]! / typical) })),
  );
}

export function polarizationMeasure(survey: BareSurvey, gleanings: Gleanings): Measure {
  const { dataset } = survey;
  const { subbands, channels } = dataset.shape;
  const band = new Band(survey, gleanings);
  const all = Array.from({ length: subbands }, (_, s) => band.samples(s, 0, channels)).flat();
  const described = dataset.polarizations.map((polarization, p) => {
    const samples = all.filter((at) => at % band.polarizations === p);
    return {
      polarization,
      counts: band.counts(samples),
      amplitude: median(samples.map((at) => band.amplitude[at]!)),
      sigma: median(samples.map((at) => band.sigma[at]!)),
      parallel: band.parallel[p]!,
    };
  });
  const hands = described.filter(({ parallel }) => parallel);
  const mean = hands.reduce((sum, { amplitude }) => sum + amplitude, 0) / hands.length;
  const typical = median(described.map(({ sigma }) => sigma));
  const rows = described.map(({ polarization, counts, amplitude, sigma, parallel }) => ({
    polarization,
    ...counts.row,
    amplitude_median: amplitude,
    noise_sigma: sigma,
    noise_ratio: sigma / typical,
    parallel: parallel ? 1 : 0,
    amplitude_ratio: parallel ? amplitude / mean : Number.NaN,
    cross_ratio: parallel ? Number.NaN : amplitude / mean,
  }));
  return fillMeasure(POLARIZATION, rows);
}
