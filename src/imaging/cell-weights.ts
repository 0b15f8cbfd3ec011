/**
 * Imaging weights. Every sample of a uv cell has its own weight times one factor of the cell, which natural, uniform
 * and robust weighting choose in their own ways.
 */
import type { Weighting } from "../dataset/plan-request.ts";
import type { FilledCells } from "./moment-grid.ts";

/**
 * (cells) factor on the weight of each sample.
 *
 * Uniform: 1/W of the cell, W the sum of weights in it, conjugates included. Robust: 1/(1 + W f^2) with
 * f^2 = (5 x 10^-R)^2 / (sum of W^2 over cells / sum of weights); R = -2 is near uniform, +2 near natural.
 * @see Briggs 1995, High fidelity deconvolution of moderately resolved sources, PhD thesis, chapter 3
 */
export function cellFactors(cells: FilledCells, weighting: Weighting): Float64Array {
  const factors = new Float64Array(cells.count);
  if (weighting.kind === "natural") return factors.fill(1);
  const density = cellDensity(cells);
  if (weighting.kind !== "robust") {
    for (let i = 0; i < factors.length; i++) factors[i] = 1 / density[i]!;
    return factors;
  }
  const f2 = robustScale(cells, density, weighting.robust);
  for (let i = 0; i < factors.length; i++) factors[i] = 1 / (1 + density[i]! * f2);
  return factors;
}

/** (cells) sum of weights in the cell; the cell at the origin holds its samples' conjugates too. */
export function cellDensity(cells: FilledCells): Float64Array {
  const density = cells.weight.slice(0, cells.count);
  for (let i = 0; i < density.length; i++) if (cells.iu[i] === 0 && cells.iv[i] === 0) density[i]! *= 2;
  return density;
}

function robustScale(cells: FilledCells, density: Float64Array, robust: number): number {
  let squares = 0;
  let weights = 0;
  for (let i = 0; i < density.length; i++) {
    const weight = cells.weight[i]!;
    // Half the plane stands for both halves, except at the origin.
    squares += density[i]! ** 2 * (density[i] === weight ? 2 : 1);
    weights += 2 * weight;
  }
  return (5 * 10 ** -robust) ** 2 / (squares / weights);
}

/** Sum of the weights that the samples of an image have. */
export function imagingWeight(cells: FilledCells, factors: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < cells.count; i++) sum += factors[i]! * cells.weight[i]!;
  return sum;
}

/**
 * Thermal rms of the image at these weights: sqrt(sum T^2 sigma^2) / sum T. NaN when the noise is unknown.
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., section 6.2
 */
export function imageNoise(cells: FilledCells, factors: Float64Array): number {
  let squares = 0;
  for (let i = 0; i < cells.count; i++) squares += factors[i]! ** 2 * cells.noise[i]!;
  return squares > 0 ? Math.sqrt(squares) / imagingWeight(cells, factors) : Number.NaN;
}

/** The cells that are left when `taken` is removed, at the moments that both have. */
export function cellsWithout(cells: FilledCells, taken: FilledCells): FilledCells {
  const order = Math.min(cells.form.order, taken.form.order);
  const left = truncated(cells, order);
  const other = truncated(taken, order);
  const size = left.moments.length / Math.max(1, left.count);
  for (let i = 0, j = 0; j < other.count; j++) {
    while (i < left.count && before(left, i, other, j)) i += 1;
    if (i === left.count) break;
    if (left.iu[i] !== other.iu[j] || left.iv[i] !== other.iv[j]) continue;
    const rest = left.weight[i]! - other.weight[j]!;
    // What remains of rounding is not a sample.
    const kept = rest > 1e-9 * left.weight[i]!;
    left.weight[i] = kept ? rest : 0;
    left.noise[i] = kept ? Math.max(0, left.noise[i]! - other.noise[j]!) : 0;
    for (let k = 0; k < size; k++) {
      const at = i * size + k;
      left.moments[at] = kept ? left.moments[at]! - other.moments[j * size + k]! : 0;
    }
  }
  return filledOnly(left);
}

function before(a: FilledCells, i: number, b: FilledCells, j: number): boolean {
  return a.iu[i]! < b.iu[j]! || (a.iu[i] === b.iu[j] && a.iv[i]! < b.iv[j]!);
}

/** A copy with moments up to `order` only. */
export function truncated(cells: FilledCells, order: number): FilledCells {
  const full = cells.form.order;
  const size = ((order + 1) * (order + 2)) / 2;
  const fullSize = ((full + 1) * (full + 2)) / 2;
  const moments = new Float64Array(cells.count * size);
  for (let i = 0; i < cells.count; i++) {
    let from = i * fullSize;
    let to = i * size;
    for (let a = 0; a <= order; a++) {
      for (let b = 0; b <= order - a; b++) moments[to++] = cells.moments[from + b]!;
      from += full - a + 1;
    }
  }
  return {
    ...cells,
    form: { ...cells.form, order },
    weight: cells.weight.slice(),
    noise: cells.noise.slice(),
    moments,
  };
}

function filledOnly(cells: FilledCells): FilledCells {
  const size = cells.moments.length / Math.max(1, cells.count);
  const { iu, iv, weight, noise, moments } = cells;
  const [newU, newV] = [iu.slice(), iv.slice()];
  let count = 0;
  for (let i = 0; i < cells.count; i++) {
    if (!(weight[i]! > 0)) continue;
    newU[count] = iu[i]!;
    newV[count] = iv[i]!;
    weight[count] = weight[i]!;
    noise[count] = noise[i]!;
    moments.copyWithin(count * size, i * size, (i + 1) * size);
    count += 1;
  }
  return { ...cells, count, iu: newU, iv: newV };
}
