/** Robust levels of the samples from the sketches, and from the tracks where a sub-band has too few channels. */
import { MAD_TO_SIGMA, median } from "../util/statistics.ts";
import type { SurveyPart } from "./survey-part.ts";
import type { Levels, Tracks } from "./survey-result.ts";

/** Variance of a second difference of white noise over that of one value. */
const SECOND_DIFFERENCE = 6;
/** Second differences in time that a noise needs. */
const FEWEST_DIFFERENCES = 3;

/** @param places  new number of each baseline */
export function finishLevels(part: SurveyPart, places: Int32Array, tracks: Tracks): Levels {
  const { subbands, channels, polarizations } = part.dataset.shape;
  const each = subbands * channels * polarizations;
  const levels = {
    median: new Float32Array(places.length * each),
    sigma: new Float32Array(places.length * each),
    count: new Uint32Array(places.length * each),
  };
  const shape = channelShape(part);
  for (let index = 0; index < places.length; index++) {
    const place = places[index]!;
    const first = place * each;
    part.amplitudes.fillMedians(index, levels.median.subarray(first, first + each));
    levels.count.set(part.amplitudes.usable(index), first);
    const sigma = part.noise.baselineSigma(index, shape);
    for (let s = 0; s < subbands; s++) {
      for (let p = 0; p < polarizations; p++) {
        const product = s * polarizations + p;
        const known =
          sigma[product]! > 0
            ? sigma[product]!
            : sigmaInTime(tracks, place, product, subbands * polarizations);
        for (let c = 0; c < channels; c++) {
          const at = (s * channels + c) * polarizations + p;
          levels.sigma[first + at] = known * shape[at]!;
        }
      }
    }
  }
  return levels;
}

/** Channels on either side whose median is a channel's noise: more than a narrow line and its neighbours take. */
const AROUND = 5;

/**
 * (subbands x channels x polarizations) noise of a channel over the typical one of its sub-band and polarization:
 * smooth along the band, as a passband is and a narrow line is not.
 */
function channelShape(part: SurveyPart): Float64Array {
  const { subbands, channels, polarizations } = part.dataset.shape;
  const sigma = part.noise.channelSigma();
  const shape = new Float64Array(sigma.length).fill(1);
  for (let s = 0; s < subbands; s++) {
    for (let p = 0; p < polarizations; p++) {
      const at = (c: number) => (s * channels + c) * polarizations + p;
      const along = Float64Array.from({ length: channels }, (_, c) => sigma[at(c)]!);
      const typical = median(along);
      if (!(typical > 0)) continue;
      for (let c = 0; c < channels; c++) {
        // Shorter towards the ends, so that a passband's edge is not flattened; the outermost have no noise of their own.
        const reach = Math.max(1, Math.min(AROUND, c, channels - 1 - c));
        const ratio = median(along.subarray(Math.max(0, c - reach), c + reach + 1)) / typical;
        if (ratio > 0) shape[at(c)] = ratio;
      }
    }
  }
  return shape;
}

/** Noise of one sample from second differences in time of the channel averages; NaN where there are too few. */
function sigmaInTime(tracks: Tracks, baseline: number, product: number, products: number): number {
  const differences: number[] = [];
  const last = tracks.firstCell[baseline + 1]!;
  for (let cell = tracks.firstCell[baseline]! + 2; cell < last; cell++) {
    if (tracks.scan[cell] !== tracks.scan[cell - 2] || tracks.setup[cell] !== tracks.setup[cell - 2])
      continue;
    const [a, b, c] = [
      (cell - 2) * products + product,
      (cell - 1) * products + product,
      cell * products + product,
    ];
    // The noise of one sample: that of the mean of n channels times sqrt(n).
    const channels = Math.sqrt(Math.min(tracks.usable[a]!, tracks.usable[b]!, tracks.usable[c]!));
    const re = tracks.real[a]! - 2 * tracks.real[b]! + tracks.real[c]!;
    const im = tracks.imag[a]! - 2 * tracks.imag[b]! + tracks.imag[c]!;
    if (!Number.isNaN(re)) differences.push(Math.abs(re) * channels);
    if (!Number.isNaN(im)) differences.push(Math.abs(im) * channels);
  }
  if (differences.length < FEWEST_DIFFERENCES) return Number.NaN;
  return (MAD_TO_SIGMA * median(differences)) / Math.sqrt(SECOND_DIFFERENCE);
}
