/** The value at rank q of numbers sorted ascending; `fallback` of none. */
export function quantileOf(sorted: readonly number[], q: number, fallback: number): number {
  return sorted[Math.min(sorted.length - 1, Math.floor(q * sorted.length))] ?? fallback;
}
