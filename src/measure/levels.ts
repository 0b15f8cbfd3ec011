/** Robust levels of the samples, from the sketches and, where channels tell no noise, from the tracks. */
import type { Shape } from "../dataset/dataset.ts";
import { median, RAYLEIGH_MEDIAN } from "../util/statistics.ts";
import type { AmplitudeSketches } from "./amplitude-sketches.ts";
import type { BaselineTally } from "./baseline-tally.ts";
import { type ChannelNoise, NoiseReader } from "./channel-noise.ts";
import type { NoiseSketches } from "./noise-sketches.ts";
import type { Levels, Tracks } from "./survey-result.ts";

/** Variance of a second difference of white noise over that of one value. */
const SECOND = 6;
/** Differences that a noise needs. */
const FEWEST = 5;
/** From this many on, differences in time are trusted against those along the channels. */
const ENOUGH_IN_TIME = 30;
/** How even the weights of the channels must be for the noise of their mean to tell that of one. */
const EVEN = 0.9;
/** Channels whose signal varies faster than a second difference follows show at least this much more than time does. */
const STRUCTURED = 1.4;

export interface LevelsOfChannels {
  readonly levels: Levels;
  /** (subbands x polarizations) */
  readonly channelNoise: readonly ChannelNoise[];
}

/** @param order  the sketches' number of each baseline, in the order of the result */
export function finishLevels(
  shape: Shape,
  amplitudes: AmplitudeSketches,
  noise: NoiseSketches,
  tally: BaselineTally,
  order: Int32Array,
  tracks: Tracks,
): LevelsOfChannels {
  const { subbands, channels, polarizations } = shape;
  const each = subbands * channels * polarizations;
  const products = subbands * polarizations;
  const levels = {
    median: new Float32Array(order.length * each),
    sigma: new Float32Array(order.length * each),
    count: new Uint32Array(order.length * each),
  };
  const reader = new NoiseReader(noise);
  const channelNoise = Array.from({ length: products }, (_, product) =>
    reader.ofChannels(Math.floor(product / polarizations), product % polarizations),
  );
  const fill = amplitudes.reader();
  const noiseAlong = channelNoise.map(({ odd }, product) =>
    reader.ofBaselines(Math.floor(product / polarizations), product % polarizations, odd, FEWEST),
  );
  for (const [place, number] of order.entries()) {
    const first = place * each;
    const last = first + each;
    fill(number, levels.median.subarray(first, last), levels.count.subarray(first, last));
    for (let product = 0; product < products; product++) {
      const subband = Math.floor(product / polarizations);
      const polarization = product % polarizations;
      const { trend } = channelNoise[product]!;
      const along = noiseAlong[product]!(number);
      const even = tally.evenness(number, product) > EVEN;
      const sigma = settle(along, sigmaInTime(tracks, place, product, products), even);
      for (let c = 0; c < channels; c++) {
        const at = first + (subband * channels + c) * polarizations + polarization;
        levels.sigma[at] = levels.count[at] === 0 ? Number.NaN : sigma * trend[c]!;
      }
    }
  }
  return { levels, channelNoise };
}

interface InTime {
  readonly sigma: number;
  readonly count: number;
}

/** Structure of the sky adds to either estimate and takes from neither: where they differ much, the smaller is noise. */
function settle(along: number, time: InTime, even: boolean): number {
  if (Number.isNaN(along)) return time.count >= FEWEST ? time.sigma : Number.NaN;
  return even && time.count >= ENOUGH_IN_TIME && time.sigma * STRUCTURED < along ? time.sigma : along;
}

/** Noise of one sample from second differences in time of the channel averages, whose noise is 1/sqrt(n) of it. */
function sigmaInTime(tracks: Tracks, baseline: number, product: number, products: number): InTime {
  const { usable, real, imag } = tracks;
  const differences: number[] = [];
  const last = tracks.firstCell[baseline + 1]!;
  for (let cell = tracks.firstCell[baseline]! + 2; cell < last; cell++) {
    if (!follow(tracks, cell - 2, cell)) continue;
    const a = (cell - 2) * products + product;
    const b = a + products;
    const c = b + products;
    if (usable[a] === 0 || usable[b] === 0 || usable[c] === 0) continue;
    const variance = 1 / usable[a]! + 4 / usable[b]! + 1 / usable[c]!;
    const re = real[a]! - 2 * real[b]! + real[c]!;
    const im = imag[a]! - 2 * imag[b]! + imag[c]!;
    differences.push(Math.sqrt((re * re + im * im) * (SECOND / variance)));
  }
  return {
    sigma: median(differences) / (RAYLEIGH_MEDIAN * Math.sqrt(SECOND)),
    count: differences.length,
  };
}

/** Cells of one run of integrations: nothing between them but what lies between them in the list. */
function follow({ scan, setup, subarray, field }: Tracks, first: number, last: number): boolean {
  return (
    scan[first] === scan[last] &&
    // Setups of one time come in turn.
    setup[first] === setup[first + 1] &&
    setup[first] === setup[last] &&
    subarray[first] === subarray[last] &&
    field[first] === field[last]
  );
}
