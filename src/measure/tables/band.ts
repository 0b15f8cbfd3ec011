/** The measures along the band: `channel`, `subband` and `polarization`. */

import { median } from "../../util/statistics.ts";
import type { ChannelCounts } from "../channel-counts.ts";
import { fillMeasure, type MeasureForm, type Row } from "../fill-measure.ts";
import { CHANNEL, POLARIZATION, SUBBAND } from "../forms.ts";
import { BAD, FLAGGED, USABLE, ZERO } from "../prepared.ts";
import type { BareSurvey } from "../survey-result.ts";
import type { Measure } from "../table.ts";
import { Counts } from "./counts.ts";
import { parallelProducts } from "./products.ts";

/** Channels on either side that the running median looks at. */
const AROUND = 8;
/** Baselines whose levels make the medians of the whole array; more would not change them and cost time. */
const MOST_BASELINES = 2000;

/** Which samples of a row, by (subband, channel, polarization), a table's row is of. */
type Picks = (subband: number, channel: number, polarization: number) => boolean;

class Band {
  private readonly survey: BareSurvey;
  private readonly channels: ChannelCounts;
  readonly parallel: readonly boolean[];
  /** (subbands x channels x polarizations) medians over the baselines */
  private readonly amplitude: Float64Array;
  private readonly sigma: Float64Array;

  constructor(survey: BareSurvey, channels: ChannelCounts) {
    this.survey = survey;
    this.channels = channels;
    this.parallel = parallelProducts(survey.dataset.polarizations);
    this.amplitude = overBaselines(survey, survey.levels.median);
    this.sigma = overBaselines(survey, survey.levels.sigma);
  }

  /** Counts of the samples picked. */
  counts(picks: Picks): Counts {
    const counts = new Counts();
    this.each((s, c, p, at) => {
      if (!picks(s, c, p)) return;
      counts.usable += this.channels.of(USABLE, at);
      counts.flagged += this.channels.of(FLAGGED, at);
      counts.bad += this.channels.of(BAD, at);
      counts.zero += this.channels.of(ZERO, at);
    });
    return counts;
  }

  /** Medians of the levels picked; of the parallel hands alone unless a polarization is asked for. */
  levels(picks: Picks, allHands = false): { amplitude: number; sigma: number } {
    const amplitudes: number[] = [];
    const sigmas: number[] = [];
    this.each((s, c, p, at) => {
      if (!picks(s, c, p) || !(allHands || this.parallel[p])) return;
      amplitudes.push(this.amplitude[at]!);
      sigmas.push(this.sigma[at]!);
    });
    return { amplitude: median(amplitudes), sigma: median(sigmas) };
  }

  private each(visit: (s: number, c: number, p: number, at: number) => void): void {
    const { subbands, channels, polarizations } = this.survey.dataset.shape;
    let at = 0;
    for (let s = 0; s < subbands; s++) {
      for (let c = 0; c < channels; c++) {
        for (let p = 0; p < polarizations; p++) visit(s, c, p, at++);
      }
    }
  }
}

function overBaselines(survey: BareSurvey, values: Float32Array): Float64Array {
  const { subbands, channels, polarizations } = survey.dataset.shape;
  const each = subbands * channels * polarizations;
  const baselines = survey.baselines.length;
  const stride = Math.max(1, Math.ceil(baselines / MOST_BASELINES));
  const picked = Array.from({ length: Math.ceil(baselines / stride) }, (_, i) => i * stride);
  return Float64Array.from({ length: each }, (_, at) => median(picked.map((b) => values[b * each + at]!)));
}

interface Described {
  readonly key: Row;
  readonly counts: Counts;
  readonly amplitude: number;
  readonly sigma: number;
}

function rowsOf(described: readonly Described[]): Row[] {
  const typical = median(described.map(({ sigma }) => sigma));
  return described.map(({ key, counts, amplitude, sigma }) => ({
    ...key,
    ...counts.row,
    amplitude_median: amplitude,
    noise_sigma: sigma,
    noise_ratio: sigma / typical,
  }));
}

function plainMeasure(form: MeasureForm, described: readonly Described[]): Measure {
  return fillMeasure(form, rowsOf(described));
}

export function channelMeasure(survey: BareSurvey, counted: ChannelCounts): Measure {
  const { subbands, channels } = survey.dataset.shape;
  const band = new Band(survey, counted);
  const described = Array.from({ length: subbands * channels }, (_, i) => {
    const [subband, channel] = [Math.floor(i / channels), i % channels];
    const picks: Picks = (s, c) => s === subband && c === channel;
    const key = { subband, channel, frequency_hz: survey.dataset.setups[0]?.frequencies[i] ?? Number.NaN };
    return { key, counts: oneChannel(counted, survey, i), ...band.levels(picks) };
  });
  const amplitudes = described.map(({ amplitude }) => amplitude);
  const typicalFlagged = median(described.map(({ counts }) => counts.flaggedFraction));
  const rows = rowsOf(described).map((row, i) => ({
    ...row,
    flagged_beyond_typical: described[i]!.counts.flaggedFraction - typicalFlagged,
    amplitude_ratio: amplitudes[i]! / runningMedian(amplitudes, i, channels),
  }));
  return fillMeasure(CHANNEL, rows);
}

/** Counts of a channel, without looking at all the others. */
function oneChannel(counted: ChannelCounts, survey: BareSurvey, subbandChannel: number): Counts {
  const { polarizations } = survey.dataset.shape;
  const counts = new Counts();
  for (let p = 0; p < polarizations; p++) {
    const at = subbandChannel * polarizations + p;
    counts.usable += counted.of(USABLE, at);
    counts.flagged += counted.of(FLAGGED, at);
    counts.bad += counted.of(BAD, at);
    counts.zero += counted.of(ZERO, at);
  }
  return counts;
}

/** Median of the channels of the same sub-band around channel `i`, itself left out. */
function runningMedian(amplitudes: readonly number[], i: number, channels: number): number {
  const first = Math.floor(i / channels) * channels;
  const from = Math.max(first, i - AROUND);
  const to = Math.min(first + channels, i + AROUND + 1);
  return median([...amplitudes.slice(from, i), ...amplitudes.slice(i + 1, to)]);
}

export function subbandMeasure(survey: BareSurvey, counted: ChannelCounts): Measure {
  const band = new Band(survey, counted);
  const described = Array.from({ length: survey.dataset.shape.subbands }, (_, subband) => {
    const picks: Picks = (s) => s === subband;
    return { key: { subband }, counts: band.counts(picks), ...band.levels(picks) };
  });
  return plainMeasure(SUBBAND, described);
}

export function polarizationMeasure(survey: BareSurvey, counted: ChannelCounts): Measure {
  const band = new Band(survey, counted);
  const described = survey.dataset.polarizations.map((polarization, index) => {
    const picks: Picks = (_s, _c, p) => p === index;
    return { key: { polarization }, counts: band.counts(picks), ...band.levels(picks, true) };
  });
  const mean =
    described.reduce((sum, { amplitude }, p) => sum + (band.parallel[p] ? amplitude : 0), 0) /
    band.parallel.filter(Boolean).length;
  const rows = rowsOf(described).map((row, p) => ({
    ...row,
    parallel: band.parallel[p] ? 1 : 0,
    amplitude_ratio: band.parallel[p] ? described[p]!.amplitude / mean : Number.NaN,
  }));
  return fillMeasure(POLARIZATION, rows);
}
