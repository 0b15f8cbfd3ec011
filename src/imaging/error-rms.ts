/**
 * The rms over a field of the image of an error, from the uv cells that carry it: with E of each sample at (u, v),
 * mean square = 1/2 sum E_i E_j sinc(field (u_i - u_j)) sinc(field (v_i - v_j)). Samples closer than 1/field add up,
 * those further apart do not; sums over cells alone would cut neighbours apart. E is taken to have one sign: the phase
 * error of an antenna in the middle of its array turns sign between its baselines, and its rms is overstated by some
 * per cent.
 */
import { type FilledCells, fieldCells } from "./moment-grid.ts";
import { sinc } from "./smearing.ts";

/** Cells on each side whose samples still add up: beyond, the sincs change sign and cancel. */
const NEIGHBOURS = 2;
const NODES = 4;

/** What a cell holds as four points of equal weight with its mean and covariance; (cells x 4), in cells. */
interface Nodes {
  readonly u: Float64Array;
  readonly v: Float64Array;
  /** (cells) sum of imaging weight */
  readonly weight: Float64Array;
}

/**
 * @param taken cells of the samples at fault, with first and second moments
 * @param factorOf imaging factor of a cell
 * @returns sqrt of the sum, and the sum of E: both times the error's size, over sum T, are fractions of the peak
 */
export function errorRms(
  taken: FilledCells,
  factorOf: (iu: number, iv: number) => number,
): { readonly rms: number; readonly weight: number } {
  const place = fieldCells(taken);
  const nodes = nodesOf(taken, factorOf);
  let squares = 0;
  let weight = 0;
  for (let i = 0; i < taken.count; i++) {
    weight += nodes.weight[i]!;
    squares += pairSum(nodes, i, i);
    for (let du = 0; du <= NEIGHBOURS; du++) {
      for (let dv = du === 0 ? 1 : -NEIGHBOURS; dv <= NEIGHBOURS; dv++) {
        const j = place(taken.iu[i]! + du, taken.iv[i]! + dv);
        if (j >= 0) squares += 2 * pairSum(nodes, i, j);
      }
    }
  }
  return { rms: Math.sqrt(Math.max(0, squares) / 2), weight };
}

function nodesOf(taken: FilledCells, factorOf: (iu: number, iv: number) => number): Nodes {
  const { order } = taken.form;
  const size = ((order + 1) * (order + 2)) / 2;
  const u = new Float64Array(taken.count * NODES);
  const v = new Float64Array(taken.count * NODES);
  const weight = new Float64Array(taken.count);
  for (let i = 0; i < taken.count; i++) {
    const at = i * size;
    const sum = taken.weight[i]!;
    weight[i] = sum * factorOf(taken.iu[i]!, taken.iv[i]!);
    // Legendre moments: P_1(2 du) = 2 du, P_2(2 du) = (12 du^2 - 1)/2.
    const meanU = taken.moments[at + order + 1]! / (2 * sum);
    const meanV = taken.moments[at + 1]! / (2 * sum);
    const uu = (2 * (taken.moments[at + 2 * order + 1]! / sum) + 1) / 12 - meanU * meanU;
    const vv = (2 * (taken.moments[at + 2]! / sum) + 1) / 12 - meanV * meanV;
    const uv = taken.moments[at + order + 2]! / (4 * sum) - meanU * meanV;
    const angle = 0.5 * Math.atan2(2 * uv, uu - vv);
    const middle = (uu + vv) / 2;
    const half = Math.hypot((uu - vv) / 2, uv);
    const long = Math.sqrt(Math.max(0, middle + half));
    const short = Math.sqrt(Math.max(0, middle - half));
    for (let k = 0; k < NODES; k++) {
      const a = k < 2 ? long : -long;
      const b = (k & 1) === 0 ? short : -short;
      u[i * NODES + k] = taken.iu[i]! + meanU + a * Math.cos(angle) - b * Math.sin(angle);
      v[i * NODES + k] = taken.iv[i]! + meanV + a * Math.sin(angle) + b * Math.cos(angle);
    }
  }
  return { u, v, weight };
}

/** Sum over the pairs of points of two cells. */
function pairSum({ u, v, weight }: Nodes, i: number, j: number): number {
  let sum = 0;
  for (let a = i * NODES; a < (i + 1) * NODES; a++) {
    for (let b = j * NODES; b < (j + 1) * NODES; b++) sum += sinc(u[a]! - u[b]!) * sinc(v[a]! - v[b]!);
  }
  return (weight[i]! * weight[j]! * sum) / (NODES * NODES);
}
