/**
 * From quantities of baselines that are differences of quantities of antennas (u, v, w; phases; residuals of
 * either) back to those of the antennas, by least squares.
 */

import { DifferenceEquations } from "./many-antennas.ts";

/** Of more antennas than this no matrix is made: it would take seconds, for each moment that is looked at. */
const MOST_DENSE = 400;

/** The baselines and antennas of one array, as indices. */
export interface Graph {
  readonly antennas: number;
  /** (pairs) index of the antenna whose quantity counts positive, and of the other */
  readonly first: Int32Array;
  readonly second: Int32Array;
}

/**
 * Solve value(pair) = x(first) - x(second) in the least-squares sense with mean x = 0, for several columns of values
 * at once. Antennas without a pair get 0.
 *
 * @param weight (pairs) >= 0
 * @param values each (pairs); ignored where the weight is 0
 * @returns each (antennas); null when the pairs fall into separate groups of antennas
 */
export function solveDifferences(
  graph: Graph,
  weight: ArrayLike<number>,
  values: readonly ArrayLike<number>[],
): Float64Array[] | null {
  const { antennas, first, second } = graph;
  const degree = new Float64Array(antennas);
  for (let p = 0; p < first.length; p++) {
    degree[first[p]!]! += weight[p]!;
    degree[second[p]!]! += weight[p]!;
  }
  const used = Int32Array.from(degree.keys()).filter((i) => degree[i]! > 0);
  if (used.length < 2) return null;
  if (used.length > MOST_DENSE) {
    const equations = new DifferenceEquations(graph, weight, degree);
    return equations.isConnected ? values.map((column) => equations.solve(column)) : null;
  }
  const place = new Int32Array(antennas).fill(-1);
  used.forEach((antenna, i) => {
    place[antenna] = i;
  });
  const n = used.length;
  const scale = used.reduce((sum, antenna) => sum + degree[antenna]!, 0) / n;
  const matrix = new Float64Array(n * n);
  // The mean is tied to 0 by a term of the size of the others, so that the matrix has an inverse.
  matrix.fill(scale / n);
  for (let p = 0; p < first.length; p++) {
    const t = weight[p]!;
    if (t === 0) continue;
    const i = place[first[p]!]!;
    const j = place[second[p]!]!;
    matrix[i * n + i]! += t;
    matrix[j * n + j]! += t;
    matrix[i * n + j]! -= t;
    matrix[j * n + i]! -= t;
  }
  if (!choleskyInPlace(matrix, n)) return null;
  return values.map((column) => {
    const right = new Float64Array(n);
    for (let p = 0; p < first.length; p++) {
      const t = weight[p]!;
      if (t === 0) continue;
      right[place[first[p]!]!]! += t * column[p]!;
      right[place[second[p]!]!]! -= t * column[p]!;
    }
    solveCholesky(matrix, n, right);
    const result = new Float64Array(antennas);
    used.forEach((antenna, i) => {
      result[antenna] = right[i]!;
    });
    return result;
  });
}

/**
 * Solve value(pair) = x(first) + x(second) in the least-squares sense: logs of amplitudes, to which two antennas
 * contribute a factor each. Antennas without a pair get 0.
 *
 * @param weight (pairs) >= 0
 * @returns (antennas); null where the pairs do not determine it, as two antennas alone do not
 */
export function solveSums(
  graph: Graph,
  weight: ArrayLike<number>,
  values: ArrayLike<number>,
): Float64Array | null {
  const { antennas, first, second } = graph;
  const matrix = new Float64Array(antennas * antennas);
  const right = new Float64Array(antennas);
  for (let p = 0; p < first.length; p++) {
    const t = weight[p]!;
    if (t === 0) continue;
    const [i, j] = [first[p]!, second[p]!];
    matrix[i * antennas + i]! += t;
    matrix[j * antennas + j]! += t;
    matrix[i * antennas + j]! += t;
    matrix[j * antennas + i]! += t;
    right[i]! += t * values[p]!;
    right[j]! += t * values[p]!;
  }
  for (let i = 0; i < antennas; i++) if (matrix[i * antennas + i] === 0) matrix[i * antennas + i] = 1;
  if (!choleskyInPlace(matrix, antennas)) return null;
  solveCholesky(matrix, antennas, right);
  return right;
}

/** Lower triangle L of A = L L^T, in place; false when A is not positive definite. */
function choleskyInPlace(a: Float64Array, n: number): boolean {
  const smallest = 1e-12 * Math.max(...Array.from({ length: n }, (_, i) => a[i * n + i]!));
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = a[i * n + j]!;
      for (let k = 0; k < j; k++) sum -= a[i * n + k]! * a[j * n + k]!;
      if (i === j) {
        if (!(sum > smallest)) return false;
        a[i * n + i] = Math.sqrt(sum);
      } else a[i * n + j] = sum / a[j * n + j]!;
    }
  }
  return true;
}

function solveCholesky(l: Float64Array, n: number, x: Float64Array): void {
  for (let i = 0; i < n; i++) {
    let sum = x[i]!;
    for (let k = 0; k < i; k++) sum -= l[i * n + k]! * x[k]!;
    x[i] = sum / l[i * n + i]!;
  }
  for (let i = n - 1; i >= 0; i--) {
    let sum = x[i]!;
    for (let k = i + 1; k < n; k++) sum -= l[k * n + i]! * x[k]!;
    x[i] = sum / l[i * n + i]!;
  }
}
