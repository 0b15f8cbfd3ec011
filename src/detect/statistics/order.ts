/** Order statistics by partial sorting, in place. */

/**
 * The k-th smallest of values[0..count), k from 0; reorders them (Hoare 1961). NaN must have been left out.
 * @returns NaN when there is none
 */
export function selectKth(values: Float32Array | Float64Array, count: number, k: number): number {
  if (!(k >= 0 && k < count)) return Number.NaN;
  let low = 0;
  let high = count - 1;
  while (low < high) {
    // Median of three: sorted and constant runs stay cheap.
    const middle = (low + high) >>> 1;
    const a = values[low]!;
    const b = values[middle]!;
    const c = values[high]!;
    const pivot = Math.max(Math.min(a, b), Math.min(Math.max(a, b), c));
    let i = low;
    let j = high;
    while (i <= j) {
      while (values[i]! < pivot) i++;
      while (values[j]! > pivot) j--;
      if (i <= j) {
        const kept = values[i]!;
        values[i] = values[j]!;
        values[j] = kept;
        i++;
        j--;
      }
    }
    if (k <= j) high = j;
    else if (k >= i) low = i;
    else break;
  }
  return values[k]!;
}

/** Median of values[0..count), the mean of the middle two when even; reorders them. NaN when there is none. */
export function medianInPlace(values: Float32Array | Float64Array, count = values.length): number {
  if (count === 0) return Number.NaN;
  const half = count >>> 1;
  const upper = selectKth(values, count, half);
  if (count % 2 === 1) return upper;
  // What lies before the middle is not above it: its largest is the other middle value.
  let lower = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < half; i++) if (values[i]! > lower) lower = values[i]!;
  return 0.5 * (lower + upper);
}
