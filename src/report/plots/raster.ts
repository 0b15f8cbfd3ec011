/**
 * More marks than a page can hold one by one, as the small squares of the plotting area that they touch. Every mark is
 * drawn: a plot of some of them would show holes that are not there.
 */
import type { RenderFunction } from "@observablehq/plot";
import { node } from "./node.ts";

/** Squares across the plotting area of the width of a chart: about the size of a dot. */
const SQUARE = 1.5;

/** Where a class of marks goes and what it looks like; later classes lie on top of earlier ones. */
export interface RasterClass {
  readonly colour: string;
  /** ends of lines, in the units of the axes; where both are the same, a dot */
  readonly from: { readonly x: ArrayLike<number>; readonly y: ArrayLike<number> };
  readonly to: { readonly x: ArrayLike<number>; readonly y: ArrayLike<number> };
}

export function raster(classes: readonly RasterClass[]): RenderFunction {
  return (_index, scales, _values, dimensions, context) => {
    const x = scales.x as (value: number) => number;
    const y = scales.y as (value: number) => number;
    const { width, height, marginLeft, marginRight, marginTop, marginBottom } = dimensions;
    const columns = Math.ceil((width - marginLeft - marginRight) / SQUARE);
    const rows = Math.ceil((height - marginTop - marginBottom) / SQUARE);
    // 0: nothing; n: class n - 1 touches it last.
    const grid = new Uint8Array(columns * rows);
    const column = (value: number) => (x(value) - marginLeft) / SQUARE;
    const row = (value: number) => (y(value) - marginTop) / SQUARE;
    for (const [i, { from, to }] of classes.entries()) {
      for (let mark = 0; mark < from.x.length; mark++) {
        const start = [column(from.x[mark]!), row(from.y[mark]!)] as const;
        const end = [column(to.x[mark]!), row(to.y[mark]!)] as const;
        touch(grid, columns, rows, start, end, i + 1);
      }
    }
    const group = node(context.document, "g", {});
    for (const [i, { colour }] of classes.entries()) {
      const d = squares(grid, columns, rows, i + 1, marginLeft, marginTop);
      if (d !== "") group.appendChild(node(context.document, "path", { d, fill: colour }));
    }
    return group;
  };
}

function touch(
  grid: Uint8Array,
  columns: number,
  rows: number,
  [startX, startY]: readonly [number, number],
  [endX, endY]: readonly [number, number],
  value: number,
): void {
  const steps = Math.ceil(Math.max(Math.abs(endX - startX), Math.abs(endY - startY)));
  // Not a place: one of the ends is not a number.
  if (!Number.isFinite(steps)) return;
  for (let step = 0; step <= steps; step++) {
    const share = steps === 0 ? 0 : step / steps;
    const column = Math.floor(startX + (endX - startX) * share);
    const row = Math.floor(startY + (endY - startY) * share);
    if (column >= 0 && column < columns && row >= 0 && row < rows) grid[row * columns + column] = value;
  }
}

/** Runs of squares of one value, row by row, as one path. */
function squares(
  grid: Uint8Array,
  columns: number,
  rows: number,
  value: number,
  left: number,
  top: number,
): string {
  let path = "";
  for (let row = 0; row < rows; row++) {
    for (let column = 0; column < columns; column++) {
      if (grid[row * columns + column] !== value) continue;
      const first = column;
      while (column + 1 < columns && grid[row * columns + column + 1] === value) column += 1;
      const length = (column + 1 - first) * SQUARE;
      path += `M${left + first * SQUARE} ${top + row * SQUARE}h${length}v${SQUARE}h${-length}z`;
    }
  }
  return path;
}
