/**
 * Which antennas are not where the table says, from what u, v, w differ by: the differences are turned back into the
 * Earth's frame, shared out over the antennas, and what all of them share (a turn, a scale, a shear) is taken out.
 */
import { solveDifferences } from "./antenna-coordinates.ts";

export interface AntennaOffset {
  /** metres, in the table's frame: x, y, z */
  readonly offset: readonly [number, number, number];
  readonly distance: number;
  /** distance over the typical one of the others */
  readonly significance: number;
}

/** A typical distance below this share of the array's size is rounding. */
const ROUNDING = 3e-7;
const LEAST_TYPICAL = 1e-4;
/** With fewer antennas a common turn cannot be told from one antenna's offset. */
const LEAST_ANTENNAS_FOR_COMMON = 8;

/**
 * @param pairs antenna indices of each spacing difference
 * @param differences (pairs) each component, metres, measured less expected; NaN where unknown
 * @param positions (antennas) table positions relative to their mean, metres
 */
export function antennaOffsets(
  pairs: { readonly first: Int32Array; readonly second: Int32Array },
  differences: readonly [Float64Array, Float64Array, Float64Array],
  positions: readonly (readonly [number, number, number])[],
): AntennaOffset[] | null {
  const antennas = positions.length;
  const weight = Float64Array.from(pairs.first, (_, p) =>
    Number.isFinite(differences[0][p]! + differences[1][p]! + differences[2][p]!) ? 1 : 0,
  );
  const clean = differences.map((column) => column.map((value) => (Number.isFinite(value) ? value : 0)));
  const solved = solveDifferences({ antennas, ...pairs }, weight, clean);
  if (solved === null) return null;
  const offsets = Array.from({ length: antennas }, (_, i): [number, number, number] => [
    solved[0]![i]!,
    solved[1]![i]!,
    solved[2]![i]!,
  ]);
  const own = withoutCommon(offsets, positions);
  const distances = own.map(([x, y, z]) => Math.hypot(x, y, z));
  const size = Math.max(...positions.map(([x, y, z]) => Math.hypot(x, y, z)));
  const sorted = [...distances].sort((a, b) => a - b);
  const half = (sorted.length - 1) >> 1;
  return own.map((offset, i) => {
    // The middle one of the others.
    const middle = sorted[distances[i]! <= sorted[half]! ? half + 1 : half] ?? 0;
    const typical = Math.max(middle, size * ROUNDING, LEAST_TYPICAL);
    return { offset, distance: distances[i]!, significance: distances[i]! / typical };
  });
}

/** Take out offset = c + A position, fitted so that few antennas far off do not pull it. */
function withoutCommon(
  offsets: readonly [number, number, number][],
  positions: readonly (readonly [number, number, number])[],
): [number, number, number][] {
  const linear = positions.length >= LEAST_ANTENNAS_FOR_COMMON;
  const size = Math.max(1e-3, ...positions.map(([x, y, z]) => Math.hypot(x, y, z)));
  const rows = positions.map(([x, y, z]) => (linear ? [1, x / size, y / size, z / size] : [1]));
  const weight = new Float64Array(offsets.length).fill(1);
  let left = offsets.map((offset): [number, number, number] => [...offset]);
  for (let round = 0; round < 40; round++) {
    const columns = [0, 1, 2].map((k) =>
      weightedFit(
        rows,
        offsets.map((offset) => offset[k]!),
        weight,
      ),
    );
    left = offsets.map((offset, i): [number, number, number] => {
      const value = (k: number) => offset[k]! - columns[k]!.reduce((sum, c, j) => sum + c * rows[i]![j]!, 0);
      return [value(0), value(1), value(2)];
    });
    left.forEach(([x, y, z], i) => {
      weight[i] = 1 / Math.max(Math.hypot(x, y, z), size * 1e-9);
    });
  }
  return left;
}

/** Weighted least squares with a ridge so small that only a column of zeros feels it. */
function weightedFit(
  rows: readonly (readonly number[])[],
  values: readonly number[],
  weight: Float64Array,
): number[] {
  const n = rows[0]!.length;
  const matrix = Array.from({ length: n }, () => new Float64Array(n + 1));
  let trace = 0;
  rows.forEach((row, i) => {
    for (let a = 0; a < n; a++) {
      for (let b = 0; b < n; b++) matrix[a]![b]! += weight[i]! * row[a]! * row[b]!;
      matrix[a]![n]! += weight[i]! * row[a]! * values[i]!;
    }
    trace += weight[i]!;
  });
  for (let a = 0; a < n; a++) matrix[a]![a]! += 1e-12 * trace;
  for (let a = 0; a < n; a++) {
    for (let r = 0; r < n; r++) {
      if (r === a) continue;
      const factor = matrix[r]![a]! / matrix[a]![a]!;
      for (let c = a; c <= n; c++) matrix[r]![c]! -= factor * matrix[a]![c]!;
    }
  }
  return matrix.map((row, a) => row[n]! / row[a]!);
}
