/** What a sample is, and what is counted and summed of a product of a row: the layout of prepared blocks. */

/** What a sample is. A flag is a flag whatever value it hides; exact zeros with a weight are no measurement. */
export const USABLE = 0;
export const FLAGGED = 1;
export const BAD = 2;
export const ZERO = 3;
/** Counts a product: by what its samples are, and of the flagged those with a weight of zero. */
export const WEIGHTLESS = 4;
export const KINDS = 5;

/** Sums a product, over channels; all but those of flagged ones of usable samples. */
export const SUM_REAL = 0;
export const SUM_IMAG = 1;
export const SUM_AMPLITUDE = 2;
export const SUM_WEIGHT = 3;
export const SLOPE_REAL = 4;
export const SLOPE_IMAG = 5;
/** |weight| of flagged samples */
export const FLAGGED_WEIGHT = 6;
/** weight squared */
export const SUM_SQUARE = 7;
export const SUMS = 8;

/** An autocorrelation, which only the totals count. */
export const AUTOCORRELATION = -1;
/** Instead of the number of a baseline that is not among the choice of them that are looked at one by one. */
export const OTHER = -2;
