/** Marks that Plot draws too largely or not at all: many dots as one path, density in few shades, a picture. */
import type { RenderFunction, ScaleFunctions } from "@observablehq/plot";
import { node, type SvgDocument, type SvgNode } from "./node.ts";

export interface Points {
  readonly x: ArrayLike<number>;
  readonly y: ArrayLike<number>;
}

/** A number in a path: one decimal is a fifth of a dot. */
function coordinate(value: number): string {
  return String(Number(value.toFixed(1)));
}

function linear(scales: ScaleFunctions): { x: (value: number) => number; y: (value: number) => number } {
  return { x: scales.x as (value: number) => number, y: scales.y as (value: number) => number };
}

/** Dots of one colour as one path: ten bytes a dot instead of sixty. Points that are not finite are left out. */
export function dots(
  points: Points,
  options: { colour: string; size?: number; opacity?: number },
): RenderFunction {
  return (_index, scales, _values, _dimensions, context) => {
    const { x, y } = linear(scales);
    let path = "";
    for (let i = 0; i < points.x.length; i++) {
      const [px, py] = [points.x[i]!, points.y[i]!];
      if (Number.isFinite(px) && Number.isFinite(py)) path += `M${coordinate(x(px))} ${coordinate(y(py))}h0`;
    }
    return strokes(context.document, path, options);
  };
}

/** Short lines of one colour as one path, round-ended: where both ends are one point, a dot. */
export function segments(
  from: Points,
  to: Points,
  options: { colour: string; size?: number; opacity?: number },
): RenderFunction {
  return (_index, scales, _values, _dimensions, context) => {
    const { x, y } = linear(scales);
    let path = "";
    for (let i = 0; i < from.x.length; i++) {
      const start = [x(from.x[i]!), y(from.y[i]!)] as const;
      const end = [x(to.x[i]!), y(to.y[i]!)] as const;
      if (![...start, ...end].every(Number.isFinite)) continue;
      const [dx, dy] = [coordinate(end[0] - start[0]), coordinate(end[1] - start[1])];
      path += `M${coordinate(start[0])} ${coordinate(start[1])}${dx === "0" && dy === "0" ? "h0" : `l${dx} ${dy}`}`;
    }
    return strokes(context.document, path, options);
  };
}

function strokes(
  document: SvgDocument,
  path: string,
  { colour, size = 2, opacity = 1 }: { colour: string; size?: number; opacity?: number },
): SvgNode {
  return node(document, "path", {
    d: path === "" ? "M0 0" : path,
    fill: "none",
    stroke: path === "" ? "none" : colour,
    "stroke-width": size,
    "stroke-linecap": "round",
    "stroke-opacity": opacity,
  });
}

/** Shades that tell densities apart, evenly in the logarithm of the count. */
const SHADES = 6;

/** Sides of a bin, user units: no rounding opens a seam between two of them. */
const BIN_WIDTH = 3.5;
const BIN_HEIGHT = 4;

/**
 * How densely points lie, in bins of the plotting area, in shades of one colour: the darkest is the densest bin, the
 * lightest any point at all.
 */
export function density(points: Points, { colour }: { colour: string }): RenderFunction {
  return (_index, scales, _values, dimensions, context) => {
    const { x, y } = linear(scales);
    const { width, height, marginLeft, marginRight, marginTop, marginBottom } = dimensions;
    const columns = Math.ceil((width - marginLeft - marginRight) / BIN_WIDTH);
    const rows = Math.ceil((height - marginTop - marginBottom) / BIN_HEIGHT);
    const counts = new Uint32Array(columns * rows);
    for (let i = 0; i < points.x.length; i++) {
      const column = Math.floor((x(points.x[i]!) - marginLeft) / BIN_WIDTH);
      const row = Math.floor((y(points.y[i]!) - marginTop) / BIN_HEIGHT);
      if (column >= 0 && column < columns && row >= 0 && row < rows) counts[row * columns + column]! += 1;
    }
    const group = node(context.document, "g", {});
    const most = counts.reduce((high, count) => Math.max(high, count), 0);
    for (let shade = 0; shade < SHADES; shade++) {
      const path = shadePath(counts, columns, rows, most, shade, (column, row) => [
        marginLeft + column * BIN_WIDTH,
        marginTop + row * BIN_HEIGHT,
      ]);
      if (path === "") continue;
      const shaped = path.replaceAll("W", coordinate(BIN_WIDTH)).replaceAll("H", coordinate(BIN_HEIGHT));
      const opacity = (0.16 + (0.84 * shade) / (SHADES - 1)).toFixed(2);
      group.appendChild(node(context.document, "path", { d: shaped, fill: colour, "fill-opacity": opacity }));
    }
    return group;
  };
}

function shadePath(
  counts: Uint32Array,
  columns: number,
  rows: number,
  most: number,
  shade: number,
  place: (column: number, row: number) => readonly [number, number],
): string {
  let path = "";
  for (let row = 0; row < rows; row++) {
    for (let column = 0; column < columns; column++) {
      const count = counts[row * columns + column]!;
      if (count === 0 || shadeOf(count, most) !== shade) continue;
      const [left, top] = place(column, row);
      path += `M${coordinate(left)} ${coordinate(top)}hWvHh-Wz`;
    }
  }
  return path;
}

function shadeOf(count: number, most: number): number {
  if (most <= 1) return SHADES - 1;
  return Math.min(SHADES - 1, Math.floor((SHADES * Math.log(count)) / Math.log(most)));
}

/** A picture over a range of both axes. */
export function picture(
  href: string,
  range: { readonly x: readonly [number, number]; readonly y: readonly [number, number] },
): RenderFunction {
  return (_index, scales, _values, _dimensions, context) => {
    const { x, y } = linear(scales);
    const [left, right] = [x(range.x[0]), x(range.x[1])].sort((a, b) => a - b);
    const [top, bottom] = [y(range.y[0]), y(range.y[1])].sort((a, b) => a - b);
    return node(context.document, "image", {
      x: left!,
      y: top!,
      width: right! - left!,
      height: bottom! - top!,
      preserveAspectRatio: "none",
      href,
    });
  };
}

/** A pattern of slanted lines, to be named as `url(#id)`: what is only suggested is told apart without colour too. */
export function hatching(id: string, colour: string): RenderFunction {
  return (_index, _scales, _values, _dimensions, context) =>
    node(
      context.document,
      "pattern",
      { id, width: 5, height: 5, patternUnits: "userSpaceOnUse", patternTransform: "rotate(45)" },
      [
        node(context.document, "rect", { width: 5, height: 5, fill: colour, "fill-opacity": 0.3 }),
        node(context.document, "rect", { width: 2, height: 5, fill: colour }),
      ],
    );
}
