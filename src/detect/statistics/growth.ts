/**
 * Rank-based growth of marks along a line: the scale-invariant rank operator. A place is marked when some interval
 * around it is marked to a share of at least 1 - eta.
 * @see Offringa, van de Gronde & Roerdink 2012, A&A 539, A95
 */

/**
 * @param marks  1 marked, 0 not; at start, start + stride, ... `length` of them; in and out
 * @param eta    0: nothing grows; 1: everything is marked
 * @param inside only gaps between marks are filled; the first and last marks stay the first and last
 */
export function growMarks(
  marks: Uint8Array,
  start: number,
  stride: number,
  length: number,
  eta: number,
  inside = false,
): void {
  // With w = eta for a mark and eta - 1 without, an interval qualifies when its sum is not negative: compare prefix sums.
  const prefix = new Float64Array(length + 1);
  let first = -1;
  let last = -1;
  for (let i = 0; i < length; i++) {
    const marked = marks[start + i * stride] === 1;
    prefix[i + 1] = prefix[i]! + (marked ? eta : eta - 1);
    if (!marked) continue;
    if (first < 0) first = i;
    last = i;
  }
  if (first < 0) return;
  const largestAfter = new Float64Array(length + 1);
  let largest = Number.NEGATIVE_INFINITY;
  for (let i = length; i >= 1; i--) {
    largest = Math.max(largest, prefix[i]!);
    largestAfter[i] = largest;
  }
  let smallest = Number.POSITIVE_INFINITY;
  for (let i = 0; i < length; i++) {
    smallest = Math.min(smallest, prefix[i]!);
    // A little slack, so that exact ties survive rounding.
    const marked = largestAfter[i + 1]! - smallest >= -1e-9;
    if (marked && (!inside || (i >= first && i <= last))) marks[start + i * stride] = 1;
  }
}
