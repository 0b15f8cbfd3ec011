/** Frequencies of a setup, for spacings in wavelengths. */
import type { Dataset, Setup } from "../../dataset/dataset.ts";

/** Lowest and highest channel centre, Hz; NaN without channels. */
export function setupRange(setup: Setup): [number, number] {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const frequency of setup.frequencies) {
    if (frequency < low) low = frequency;
    if (frequency > high) high = frequency;
  }
  return low <= high ? [low, high] : [Number.NaN, Number.NaN];
}

/** Middle of each sub-band, Hz: (setups) of (subbands). */
export function subbandMiddles(dataset: Dataset): Float64Array[] {
  const { subbands, channels } = dataset.shape;
  return dataset.setups.map(({ frequencies }) =>
    Float64Array.from({ length: subbands }, (_, subband) => {
      const first = frequencies[subband * channels] ?? Number.NaN;
      const last = frequencies[subband * channels + channels - 1] ?? Number.NaN;
      return (first + last) / 2;
    }),
  );
}
