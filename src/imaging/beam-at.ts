/** The dirty beam at one place, summed over the uv cells: no pixels and no interpolation. */
import { fillWave } from "./legendre.ts";
import type { FilledCells } from "./moment-grid.ts";

/**
 * @param factors (cells) imaging factor of each cell
 * @param total sum of the imaging weights
 * @param l,m east and north, radians, inside the field of the cells
 */
export function beamAt(
  cells: FilledCells,
  factors: Float64Array,
  total: number,
  l: number,
  m: number,
): number {
  const { order, field } = cells.form;
  const size = ((order + 1) * (order + 2)) / 2;
  const alongL = new Float64Array(order + 1);
  const alongM = new Float64Array(order + 1);
  fillWave(l / field, order, alongL);
  fillWave(m / field, order, alongM);
  // i^(a + b) times a wave of each: even orders are real, odd ones imaginary.
  const even = new Float64Array(size);
  const odd = new Float64Array(size);
  for (let a = 0, k = 0; a <= order; a++) {
    for (let b = 0; b <= order - a; b++, k++) {
      const turn = (a + b) & 3;
      const wave = alongL[a]! * alongM[b]! * (turn < 2 ? 1 : -1);
      if ((turn & 1) === 0) even[k] = wave;
      else odd[k] = wave;
    }
  }
  const turnsL = (2 * Math.PI * l) / field;
  const turnsM = (2 * Math.PI * m) / field;
  let sum = 0;
  for (let i = 0; i < cells.count; i++) {
    let re = 0;
    let im = 0;
    for (let k = 0, at = i * size; k < size; k++, at++) {
      re += even[k]! * cells.moments[at]!;
      im += odd[k]! * cells.moments[at]!;
    }
    const phase = turnsL * cells.iu[i]! + turnsM * cells.iv[i]!;
    sum += factors[i]! * (re * Math.cos(phase) - im * Math.sin(phase));
  }
  return sum / total;
}
