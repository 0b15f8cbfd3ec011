/**
 * Imaging weights of the atoms, as an imager gives them on cells of one over the field.
 * @see Briggs 1995, PhD thesis, New Mexico Tech, ch. 3
 */
import type { Weighting } from "../../dataset/plan-request.ts";
import type { Atoms } from "../samples/atoms.ts";

/** (atoms) normalised to a sum of 1 over those that the pixels sample; 0 for the others. */
export function imagingWeights(
  atoms: Atoms,
  width: number,
  height: number,
  weighting: Weighting,
): Float64Array {
  const weights = new Float64Array(atoms.count);
  const columns = width + 2;
  const cells = new Float64Array(columns * (height + 2));
  const cellOf = (k: number): number => {
    // A sample and its conjugate are one: those of the other half are turned round.
    const turn = atoms.cycles.y[k]! < 0 ? -1 : 1;
    const x = Math.round(turn * atoms.cycles.x[k]! * width) + (columns >> 1);
    const y = Math.round(turn * atoms.cycles.y[k]! * height);
    return y * columns + x;
  };
  const sampled = (k: number) => Math.abs(atoms.cycles.x[k]!) < 0.5 && Math.abs(atoms.cycles.y[k]!) < 0.5;
  if (weighting.kind !== "natural") {
    for (let k = 0; k < atoms.count; k++) if (sampled(k)) cells[cellOf(k)]! += atoms.weight[k]!;
  }
  const factor = weighting.kind === "robust" ? robustFactor(cells, weighting.robust) : 0;
  let sum = 0;
  for (let k = 0; k < atoms.count; k++) {
    if (!sampled(k)) continue;
    const own = atoms.weight[k]!;
    if (weighting.kind === "natural") weights[k] = own;
    else if (weighting.kind === "uniform") weights[k] = own / cells[cellOf(k)]!;
    else weights[k] = own / (1 + cells[cellOf(k)]! * factor);
    sum += weights[k]!;
  }
  if (sum > 0) for (let k = 0; k < atoms.count; k++) weights[k]! /= sum;
  return weights;
}

/** f^2 = (5 x 10^-R)^2 / (sum W^2 / sum w) */
function robustFactor(cells: Float64Array, robust: number): number {
  let squares = 0;
  let sum = 0;
  for (const cell of cells) {
    squares += cell * cell;
    sum += cell;
  }
  return squares === 0 ? 0 : (5 * 10 ** -robust) ** 2 / (squares / sum);
}

/** rms of the image that the noise of the atoms makes, dataset unit; NaN where noise is unknown. */
export function imageNoise(atoms: Atoms, weights: Float64Array): number {
  let sum = 0;
  for (let k = 0; k < atoms.count; k++) if (weights[k]! > 0) sum += weights[k]! ** 2 / atoms.weight[k]!;
  return Math.sqrt(sum * atoms.noise);
}
