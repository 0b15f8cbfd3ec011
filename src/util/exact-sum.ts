/**
 * Sums that come out the same in whatever order and grouping their terms are added: each term is rounded to a multiple of
 * one power of two, so coarse that no sum of theirs outgrows the 53 bits of a double and every addition is exact.
 */

/**
 * The power of two to round to.
 *
 * @param largest  no |term| exceeds it
 * @param terms    no more terms than this
 */
export function exactQuantum(largest: number, terms: number): number {
  const bound = Math.max(largest, 2 ** -900) * Math.max(1, terms);
  return 2 ** (Math.ceil(Math.log2(bound)) - 52);
}

/** The multiple of the quantum nearest to a term. */
export function toMultiple(term: number, quantum: number): number {
  return Math.round(term / quantum) * quantum;
}
