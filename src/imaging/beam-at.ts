/** The dirty beam at one place, summed over the uv cells: no pixels and no interpolation. */
import { fillWave } from "./legendre.ts";
import type { FilledCells } from "./moment-grid.ts";

/** Waves below this share of the first leave the beam as it is. */
const NOTHING = 1e-6;

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
  // i^(a + b) times a wave of each: even orders are real, odd ones imaginary. Far inside the field most are nothing.
  const waves: { readonly moment: number; readonly even: number; readonly odd: number }[] = [];
  for (let a = 0, moment = 0; a <= order; a++) {
    for (let b = 0; b <= order - a; b++, moment++) {
      const turn = (a + b) & 3;
      const wave = alongL[a]! * alongM[b]! * (turn < 2 ? 1 : -1);
      if (Math.abs(wave) < NOTHING) continue;
      waves.push({ moment, even: (turn & 1) === 0 ? wave : 0, odd: (turn & 1) === 0 ? 0 : wave });
    }
  }
  const moments = Int32Array.from(waves, ({ moment }) => moment);
  const even = Float64Array.from(waves, (wave) => wave.even);
  const odd = Float64Array.from(waves, (wave) => wave.odd);
  const turnsL = (2 * Math.PI * l) / field;
  const turnsM = (2 * Math.PI * m) / field;
  let sum = 0;
  for (let i = 0; i < cells.count; i++) {
    let re = 0;
    let im = 0;
    for (let k = 0; k < moments.length; k++) {
      const value = cells.moments[i * size + moments[k]!]!;
      re += even[k]! * value;
      im += odd[k]! * value;
    }
    const phase = turnsL * cells.iu[i]! + turnsM * cells.iv[i]!;
    sum += factors[i]! * (re * Math.cos(phase) - im * Math.sin(phase));
  }
  return sum / total;
}
