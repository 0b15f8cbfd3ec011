/** Cells of a uv grid as points that stand for the samples in them. */
import type { FieldPoints } from "./field-rms.ts";
import type { FilledCells } from "./moment-grid.ts";

/** Imaging factor of a cell. */
export type CellFactor = (iu: number, iv: number) => number;

/** A cell becomes this many points of equal weight with the mean and covariance of what it holds. */
const NODES = 4;

export interface PointList {
  /** @param u,v cells */
  add(u: number, v: number, even: number, odd: number): void;
  take(): FieldPoints;
}

export function pointList(): PointList {
  const columns: [number[], number[], number[], number[]] = [[], [], [], []];
  return {
    add: (...values) => {
      for (let i = 0; i < columns.length; i++) columns[i]!.push(values[i]!);
    },
    take: () => ({
      count: columns[0].length,
      u: Float64Array.from(columns[0]),
      v: Float64Array.from(columns[1]),
      even: Float64Array.from(columns[2]),
      odd: Float64Array.from(columns[3]),
    }),
  };
}

/**
 * @param cells with moments of second order at least
 * @param real,imaginary what each sample carries, of a weight of 1
 */
export function addCellPoints(
  points: PointList,
  cells: FilledCells,
  factorOf: CellFactor,
  real: number,
  imaginary: number,
): void {
  const { order } = cells.form;
  const size = ((order + 1) * (order + 2)) / 2;
  for (let i = 0; i < cells.count; i++) {
    const at = i * size;
    const sum = cells.weight[i]!;
    const weight = (sum * factorOf(cells.iu[i]!, cells.iv[i]!)) / NODES;
    // Legendre moments: P_1(2 du) = 2 du, P_2(2 du) = (12 du^2 - 1)/2.
    const meanU = cells.moments[at + order + 1]! / (2 * sum);
    const meanV = cells.moments[at + 1]! / (2 * sum);
    const uu = (2 * (cells.moments[at + 2 * order + 1]! / sum) + 1) / 12 - meanU * meanU;
    const vv = (2 * (cells.moments[at + 2]! / sum) + 1) / 12 - meanV * meanV;
    const uv = cells.moments[at + order + 2]! / (4 * sum) - meanU * meanV;
    const angle = 0.5 * Math.atan2(2 * uv, uu - vv);
    const middle = (uu + vv) / 2;
    const half = Math.hypot((uu - vv) / 2, uv);
    const long = Math.sqrt(Math.max(0, middle + half));
    const short = Math.sqrt(Math.max(0, middle - half));
    for (let k = 0; k < NODES; k++) {
      const a = k < 2 ? long : -long;
      const b = (k & 1) === 0 ? short : -short;
      points.add(
        cells.iu[i]! + meanU + a * Math.cos(angle) - b * Math.sin(angle),
        cells.iv[i]! + meanV + a * Math.sin(angle) + b * Math.cos(angle),
        weight * real,
        weight * imaginary,
      );
    }
  }
}
