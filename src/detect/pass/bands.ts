/** The frequency axes that the second pass looks along. */
import type { Shape } from "../../dataset/dataset.ts";

/** A run of channels that is looked at as one: a sub-band, or all of them where each has too few channels. */
export interface Band {
  /** first channel counted over all sub-bands, and how many */
  readonly first: number;
  readonly columns: number;
  /** the sub-band, or null: all */
  readonly subband: number | null;
}

/** Channels that tell a narrow feature from the rest of the band. */
export const FEWEST_COLUMNS = 6;

/** Bands of a dataset; empty where there are too few channels to look along frequency at all. */
export function bandsOf({ subbands, channels }: Shape): Band[] {
  if (channels >= FEWEST_COLUMNS) {
    return Array.from({ length: subbands }, (_, subband) => ({
      first: subband * channels,
      columns: channels,
      subband,
    }));
  }
  const columns = subbands * channels;
  return columns >= FEWEST_COLUMNS ? [{ first: 0, columns, subband: null }] : [];
}
