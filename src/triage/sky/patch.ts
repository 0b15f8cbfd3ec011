/** A response centred on a pixel, and templates of part of an image. */
import type { ImageFrame } from "../uv/frame.ts";

/** (2 halfY + 1) x (2 halfX + 1), 1 in the middle. */
export interface Patch {
  readonly halfX: number;
  readonly halfY: number;
  readonly values: Float64Array;
}

/** What a parameter adds to the image, within a box. */
export interface Template {
  readonly x0: number;
  readonly y0: number;
  readonly width: number;
  readonly height: number;
  readonly values: Float64Array;
}

/** exp(-(a x^2 + 2 b x y + c y^2)), x and y in pixels. */
export interface PixelGaussian {
  readonly a: number;
  readonly b: number;
  readonly c: number;
}

/** sigma over the full width at half maximum of a Gaussian */
const SIGMA = 1 / Math.sqrt(8 * Math.LN2);

/** Second moments of a Gaussian beam, direction cosines squared: ll, lm, mm. */
export function beamMoments(beam: {
  readonly major: number;
  readonly minor: number;
  readonly angle: number;
}): [number, number, number] {
  const [major, minor] = [(beam.major * SIGMA) ** 2, (beam.minor * SIGMA) ** 2];
  const [s, c] = [Math.sin(beam.angle), Math.cos(beam.angle)];
  return [major * s * s + minor * c * c, (major - minor) * s * c, major * c * c + minor * s * s];
}

/** The Gaussian with second moments in direction cosines, as pixels see it. */
export function gaussianOfMoments(
  { matrix }: ImageFrame,
  [ll, lm, mm]: readonly [number, number, number],
): PixelGaussian {
  const [a, b, c, d] = matrix;
  const determinant = ll * mm - lm * lm;
  // Half the inverse of the moments, carried over to pixels.
  const [p, q, r] = [mm / determinant / 2, -lm / determinant / 2, ll / determinant / 2];
  return {
    a: p * a * a + 2 * q * a * c + r * c * c,
    b: p * a * b + q * (a * d + b * c) + r * c * d,
    c: p * b * b + 2 * q * b * d + r * d * d,
  };
}

/** Second moments in direction cosines of a Gaussian of pixels. */
export function momentsOfGaussian({ matrix }: ImageFrame, g: PixelGaussian): [number, number, number] {
  const determinant = 4 * (g.a * g.c - g.b * g.b);
  const [xx, xy, yy] = [(2 * g.c) / determinant, (-2 * g.b) / determinant, (2 * g.a) / determinant];
  const [a, b, c, d] = matrix;
  return [
    a * a * xx + 2 * a * b * xy + b * b * yy,
    a * c * xx + (a * d + b * c) * xy + b * d * yy,
    c * c * xx + 2 * c * d * xy + d * d * yy,
  ];
}

/** Full widths at half maximum of second moments, and the angle of the major axis from north through east. */
export function widthsOf([ll, lm, mm]: readonly [number, number, number]): {
  readonly major: number;
  readonly minor: number;
  readonly angle: number;
} {
  const mean = (ll + mm) / 2;
  const half = Math.hypot((mm - ll) / 2, lm);
  return {
    major: Math.sqrt(Math.max(0, mean + half)) / SIGMA,
    minor: Math.sqrt(Math.max(0, mean - half)) / SIGMA,
    angle: 0.5 * Math.atan2(2 * lm, mm - ll),
  };
}

/** Half the box that holds a Gaussian down to 1e-7 of its peak. */
function reachOf({ a, b, c }: PixelGaussian): [number, number] {
  const determinant = a * c - b * b;
  const depth = 16;
  return [Math.ceil(Math.sqrt((depth * c) / determinant)), Math.ceil(Math.sqrt((depth * a) / determinant))];
}

export function gaussianPatch(g: PixelGaussian): Patch {
  const [halfX, halfY] = reachOf(g);
  const values = new Float64Array((2 * halfX + 1) * (2 * halfY + 1));
  for (let y = -halfY, at = 0; y <= halfY; y++) {
    for (let x = -halfX; x <= halfX; x++, at++) {
      values[at] = Math.exp(-(g.a * x * x + 2 * g.b * x * y + g.c * y * y));
    }
  }
  return { halfX, halfY, values };
}

/** A Gaussian of height 1 at (x, y) in pixels from the first, and its derivatives by x and y. */
export function gaussianTemplates(
  g: PixelGaussian,
  x: number,
  y: number,
  width: number,
  height: number,
): [Template, Template, Template] | null {
  const [halfX, halfY] = reachOf(g);
  const x0 = Math.max(0, Math.floor(x - halfX));
  const y0 = Math.max(0, Math.floor(y - halfY));
  const w = Math.min(width, Math.ceil(x + halfX) + 1) - x0;
  const h = Math.min(height, Math.ceil(y + halfY) + 1) - y0;
  if (w <= 0 || h <= 0) return null;
  const make = () => ({ x0, y0, width: w, height: h, values: new Float64Array(w * h) });
  const [value, byX, byY] = [make(), make(), make()];
  for (let j = 0, at = 0; j < h; j++) {
    for (let i = 0; i < w; i++, at++) {
      const [dx, dy] = [x0 + i - x, y0 + j - y];
      const size = Math.exp(-(g.a * dx * dx + 2 * g.b * dx * dy + g.c * dy * dy));
      value.values[at] = size;
      byX.values[at] = 2 * size * (g.a * dx + g.b * dy);
      byY.values[at] = 2 * size * (g.b * dx + g.c * dy);
    }
  }
  return [value, byX, byY];
}

export function wholeTemplate(values: Float64Array, width: number, height: number): Template {
  return { x0: 0, y0: 0, width, height, values };
}

/** Sum of products over the pixels that both hold. */
export function dot(one: Template, other: Template): number {
  const x0 = Math.max(one.x0, other.x0);
  const y0 = Math.max(one.y0, other.y0);
  const x1 = Math.min(one.x0 + one.width, other.x0 + other.width);
  const y1 = Math.min(one.y0 + one.height, other.y0 + other.height);
  let sum = 0;
  for (let y = y0; y < y1; y++) {
    let i = (y - one.y0) * one.width + x0 - one.x0;
    let j = (y - other.y0) * other.width + x0 - other.x0;
    for (let x = x0; x < x1; x++, i++, j++) sum += one.values[i]! * other.values[j]!;
  }
  return sum;
}

/** target += factor x template, the target a whole image. */
export function addTo(target: Float64Array, width: number, template: Template, factor: number): void {
  const { x0, y0, values } = template;
  for (let y = 0, at = 0; y < template.height; y++) {
    const row = (y0 + y) * width + x0;
    for (let x = 0; x < template.width; x++, at++) target[row + x]! += factor * values[at]!;
  }
}
