/** Stripes: the strongest single wave in the image. */

import { formatAngle, formatNumber } from "../../util/units.ts";
import type { Understanding } from "../sky/understand.ts";
import type { UvCells } from "../uv/cells.ts";
import type { Symptom } from "./symptom.ts";

/** A wave is a stripe where it is this high, in the noise of the image, and out of family in the uv plane. */
const LEAST_SIGMAS = 1;
/** And where its cell and the two on each side hold this much of all the power: many waves are no stripes. */
const LEAST_HELD = 0.15;
const DEGREE = Math.PI / 180;

export function measureStripes(seen: Understanding, cells: UvCells): Symptom {
  const { image, frame } = seen;
  let at = 0;
  let all = 0;
  for (let i = 0; i < cells.power.length; i++) {
    all += cells.power[i]!;
    if (cells.power[i]! > cells.power[at]!) at = i;
  }
  const pixels = image.known.reduce((sum, one) => sum + one, 0);
  const height = (2 * Math.sqrt(cells.power[at]!)) / pixels;
  const sigmas = height / seen.noise;
  const column = at % cells.columns;
  const row = Math.floor(at / cells.columns);
  // Cycles a pixel back to wavelengths: the inverse of the transposed matrix.
  const [fx, fy] = [(column - (cells.columns >> 1)) / image.width, row / image.height];
  const [a, b, c, d] = frame.matrix;
  const determinant = a * d - b * c;
  const [u, v] = [(d * fx - c * fy) / determinant, (-b * fx + a * fy) / determinant];
  const spacing = 1 / Math.hypot(u, v);
  const direction = (Math.atan2(u, v) / DEGREE + 360) % 180;
  const held = powerAround(cells, column, row) / Math.max(all, 1e-300);
  const present = cells.outliers[0] === at && sigmas >= LEAST_SIGMAS && held >= LEAST_HELD;
  const measured = {
    spacingRad: spacing,
    directionDeg: direction,
    heightSigmas: sigmas,
    heightImageUnit: height,
    uWavelengths: u,
    vWavelengths: v,
  };
  const wave = `spacing ${formatAngle(spacing)} along ${formatNumber(direction)} deg (north through east), height ${formatNumber(sigmas)} sigma`;
  return {
    word: "stripes",
    present,
    text: present ? `One wave stands out: ${wave}.` : `No single wave stands out; the strongest has ${wave}.`,
    measured,
  };
}

function powerAround({ power, columns, rows }: UvCells, column: number, row: number): number {
  let sum = 0;
  for (let j = Math.max(0, row - 2); j <= Math.min(rows - 1, row + 2); j++) {
    for (let i = Math.max(0, column - 2); i <= Math.min(columns - 1, column + 2); i++) {
      sum += power[j * columns + i]!;
    }
  }
  return sum;
}
