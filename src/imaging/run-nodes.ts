/**
 * A run of channels that lie along a short line in the uv plane, replaced by a few weighted points on it with the
 * same moments: many narrow channels then cost no more than those few. Exact for what a moment grid keeps.
 */

/**
 * (nodes x nodes) row j, column k: coefficient of t^k in the Lagrange polynomial of node j, for nodes spread evenly
 * over 0..1. A node's weight is the sum over k of the row and the moments sum of weight t^k.
 */
export function lagrangeCoefficients(nodes: number): Float64Array {
  const coefficients = new Float64Array(nodes * nodes);
  for (let j = 0; j < nodes; j++) {
    let polynomial = [1];
    for (let other = 0; other < nodes; other++) {
      if (other === j) continue;
      const root = other / (nodes - 1);
      const scale = 1 / (j / (nodes - 1) - root);
      const next = new Array<number>(polynomial.length + 1).fill(0);
      polynomial.forEach((value, power) => {
        next[power + 1]! += value * scale;
        next[power]! -= value * root * scale;
      });
      polynomial = next;
    }
    coefficients.set(polynomial, j * nodes);
  }
  return coefficients;
}

/**
 * Weights of the nodes at 0, T/(nodes-1), ..., T that have the moments `sums[k]` = sum of weight t^k.
 * @param span T > 0
 */
export function fillNodeWeights(
  coefficients: Float64Array,
  sums: Float64Array,
  span: number,
  weights: Float64Array,
): void {
  const nodes = weights.length;
  for (let j = 0; j < nodes; j++) {
    let weight = 0;
    let scale = 1;
    for (let k = 0; k < nodes; k++) {
      weight += coefficients[j * nodes + k]! * sums[k]! * scale;
      scale /= span;
    }
    weights[j] = weight;
  }
}
