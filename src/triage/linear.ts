/** Least squares by normal equations: small symmetric systems. */

/** Columns that the ones before them give to this share are left out: their coefficient is 0. */
const LEAST_OWN = 1e-10;

/**
 * The lower triangle L of a symmetric matrix L L^T (n x n, row by row). Where a column is a combination of those before
 * it, its diagonal element is 0.
 */
export function cholesky(matrix: Float64Array, n: number): Float64Array {
  const lower = new Float64Array(n * n);
  for (let j = 0; j < n; j++) {
    let own = matrix[j * n + j]!;
    for (let k = 0; k < j; k++) own -= lower[j * n + k]! ** 2;
    if (!(own > LEAST_OWN * matrix[j * n + j]!)) continue;
    const root = Math.sqrt(own);
    lower[j * n + j] = root;
    for (let i = j + 1; i < n; i++) {
      let sum = matrix[i * n + j]!;
      for (let k = 0; k < j; k++) sum -= lower[i * n + k]! * lower[j * n + k]!;
      lower[i * n + j] = sum / root;
    }
  }
  return lower;
}

/** x of L L^T x = b; 0 where the diagonal of L is 0. */
export function solveCholesky(lower: Float64Array, b: Float64Array): Float64Array {
  const n = b.length;
  const x = Float64Array.from(b);
  for (let i = 0; i < n; i++) {
    const own = lower[i * n + i]!;
    for (let k = 0; k < i; k++) x[i]! -= lower[i * n + k]! * x[k]!;
    x[i] = own === 0 ? 0 : x[i]! / own;
  }
  for (let i = n - 1; i >= 0; i--) {
    const own = lower[i * n + i]!;
    for (let k = i + 1; k < n; k++) x[i]! -= lower[k * n + i]! * x[k]!;
    x[i] = own === 0 ? 0 : x[i]! / own;
  }
  return x;
}
