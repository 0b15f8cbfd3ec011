/**
 * Thermal noise of samples and of images. The noise of a sample is the one measured on its baseline and channel,
 * shared out over its samples by weight, since a weight stands for 1/variance.
 */
import { type Sampling, trackOffset } from "./sampling.ts";

/** 2 ln 2: the squared median of a Rayleigh amplitude in units of sigma squared. */
const RAYLEIGH_MEDIAN_SQUARED = 2 * Math.LN2;

/** Relative error of the squared median of n Rayleigh amplitudes, times sqrt(n): 2 x 1.2533 x 0.6551 / 1.1774. */
const MEDIAN_SQUARED_ERROR = 1.395;

/**
 * (baselines x subbands x channels x polarizations) weight times variance of a sample, which is the same for every
 * sample there: 1 where weights are true, 1/Jy^2. NaN where nothing in the dataset tells the noise.
 */
export function fillWeightedVariance(sampling: Sampling): Float64Array {
  const { survey } = sampling;
  const { subbands, channels, polarizations } = survey.dataset.shape;
  const { sigma } = survey.levels;
  const typical = typicalWeights(sampling);
  const variance = new Float64Array(sigma.length);
  for (let b = 0, at = 0; b < survey.baselines.length; b++) {
    for (let s = 0; s < subbands; s++) {
      for (let c = 0; c < channels; c++) {
        for (let p = 0; p < polarizations; p++, at++) {
          const rms = sigma[at]!;
          const weight = typical[(b * subbands + s) * polarizations + p]!;
          // A noise of exactly zero is a stuck or simulated value and tells nothing.
          variance[at] = rms > 0 ? rms * rms * weight : Number.NaN;
        }
      }
    }
  }
  const fallback = medianKnown(variance, 0);
  for (let at = 0; at < variance.length; at++) if (!(variance[at]! >= 0)) variance[at] = fallback;
  return variance;
}

/** (baselines x subbands x polarizations) mean weight of a usable sample; NaN where none is usable. */
function typicalWeights(sampling: Sampling): Float64Array {
  const { survey } = sampling;
  const { tracks, dataset } = survey;
  const { subbands, polarizations } = dataset.shape;
  const products = subbands * polarizations;
  const sum = new Float64Array(survey.baselines.length * products);
  const count = new Float64Array(sum.length);
  for (let cell = 0; cell < tracks.cells; cell++) {
    const from = trackOffset(dataset, cell, 0);
    const to = tracks.baseline[cell]! * products;
    for (let i = 0; i < products; i++) {
      const weight = tracks.weight[from + i]!;
      if (!(weight > 0 && weight < Number.POSITIVE_INFINITY)) continue;
      sum[to + i]! += weight;
      count[to + i]! += tracks.usable[from + i]!;
    }
  }
  for (let i = 0; i < sum.length; i++) sum[i] = count[i] === 0 ? Number.NaN : sum[i]! / count[i]!;
  return sum;
}

/** Levels can be millions: every so many of them has the median of all. */
const MEDIAN_VALUES = 100_000;

function strideOf(length: number): number {
  return Math.max(1, Math.floor(length / MEDIAN_VALUES));
}

/** Median of those that are `least` or more, NaN where none is; of very many, of every so many. */
export function medianKnown(values: Float64Array | Float32Array, least: number): number {
  const known: number[] = [];
  for (let i = 0; i < values.length; i += strideOf(values.length))
    if (values[i]! >= least) known.push(values[i]!);
  // Where almost nothing is known, a stride may miss it.
  if (known.length === 0) return values.find((value) => value >= least) ?? Number.NaN;
  known.sort((a, b) => a - b);
  return known[known.length >> 1]!;
}

/**
 * rms of a naturally weighted image, dataset unit: 1/sqrt(sum of 1/variance) where weights are true.
 * NaN when the noise is unknown.
 */
export function naturalNoise(sampling: Sampling): number {
  const { survey, products, totalWeight } = sampling;
  const { polarizations, subbands, channels } = survey.dataset.shape;
  const variance = fillWeightedVariance(sampling);
  const typical = typicalWeights(sampling);
  const { count } = survey.levels;
  let squares = 0;
  let weights = 0;
  for (let b = 0; b < survey.baselines.length; b++) {
    for (let s = 0; s < subbands; s++) {
      const weightAt = (b * subbands + s) * polarizations;
      for (let c = 0; c < channels; c++) {
        const at = ((b * subbands + s) * channels + c) * polarizations;
        for (let i = 0; i < products.length; i++) {
          const p = products[i]!;
          if (count[at + p] === 0 || !(typical[weightAt + p]! > 0)) continue;
          const weight = typical[weightAt + p]! * count[at + p]!;
          weights += weight;
          squares += weight * variance[at + p]!;
        }
      }
    }
  }
  if (!(weights > 0 && totalWeight > 0)) return Number.NaN;
  // The levels count every field; the image has the weight of one.
  return Math.sqrt(squares / weights / totalWeight);
}

/**
 * How bright the source is, dataset unit: upper quartile over baselines, sub-bands and products of the median
 * amplitude with the noise taken out. 0 when nothing stands above the noise, NaN when that is unknown.
 */
export function brightness(sampling: Sampling): number {
  const { survey, products } = sampling;
  const { polarizations, subbands, channels } = survey.dataset.shape;
  const { median, sigma, count } = survey.levels;
  const found: number[] = [];
  for (let cell = 0; cell < survey.baselines.length * subbands; cell++) {
    for (let i = 0; i < products.length; i++) {
      let squares = 0;
      let noiseSquares = 0;
      let samples = 0;
      let used = 0;
      for (let c = 0; c < channels; c++) {
        const at = (cell * channels + c) * polarizations + products[i]!;
        if (count[at] === 0 || !(median[at]! >= 0)) continue;
        const noise = Number.isFinite(sigma[at]!) ? sigma[at]! : 0;
        noiseSquares += RAYLEIGH_MEDIAN_SQUARED * noise * noise;
        squares += median[at]! ** 2;
        samples += count[at]!;
        used += 1;
      }
      if (used === 0) continue;
      const signal = (squares - noiseSquares) / used;
      const error = (MEDIAN_SQUARED_ERROR * noiseSquares) / used / Math.sqrt(samples);
      found.push(signal > 3 * error ? Math.sqrt(signal) : 0);
    }
  }
  if (found.length === 0) return Number.NaN;
  found.sort((a, b) => a - b);
  return found[Math.min(found.length - 1, Math.floor(found.length * 0.75))]!;
}

/**
 * System equivalent flux density of an antenna that the measured noise means, Jy: median over baselines, sub-bands
 * and products of sigma sqrt(2 dnu tau), for a perfect correlator. NaN when the amplitudes are not in Jy.
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., section 6.2
 */
export function measuredSefd(sampling: Sampling): number {
  const { survey, products } = sampling;
  const { dataset, levels } = survey;
  const { subbands, channels, polarizations } = dataset.shape;
  const setup = dataset.setups[0];
  if (dataset.unit !== "Jy" || setup === undefined || !(survey.integration > 0)) return Number.NaN;
  const found: number[] = [];
  const stride = polarizations * strideOf(levels.sigma.length / polarizations);
  for (let at = 0; at < levels.sigma.length; at += stride) {
    const width = setup.channelWidths[Math.floor(at / polarizations / channels) % subbands]!;
    for (const product of products) {
      const sigma = levels.sigma[at + product]!;
      if (sigma > 0 && levels.count[at + product]! > 0) {
        found.push(sigma * Math.sqrt(2 * width * survey.integration));
      }
    }
  }
  if (found.length === 0) return Number.NaN;
  found.sort((a, b) => a - b);
  return found[found.length >> 1]!;
}
