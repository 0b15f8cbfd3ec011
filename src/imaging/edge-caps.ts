/** The dynamic range around a source at the edge of the field, from what each visibility of it is off by. */
import type { EdgeSamples } from "./edge-samples.ts";
import { type FieldPoints, meanSquareOverField } from "./field-rms.ts";

/** Samples in squares of this many to a cell of 1/field a side become one point. */
const FINENESS = 3;

/**
 * Peak over rms, within a field's width of the source, of the image of the errors.
 *
 * @param field   radians
 * @param errorOf real and imaginary part of the error of a visibility of 1; NaN leaves the sample out
 */
export function edgeDynamicRange(
  samples: EdgeSamples,
  field: number,
  errorOf: (sample: number) => readonly [number, number],
): number {
  const points = new Map<number, Point>();
  let total = 0;
  let own = 0;
  for (let i = 0; i < samples.count; i++) {
    const [real, imaginary] = errorOf(i);
    if (Number.isNaN(real + imaginary)) continue;
    const weight = samples.weight[i]!;
    const sign = samples.u[i]! < 0 ? -1 : 1;
    const [u, v] = [sign * samples.u[i]! * field, sign * samples.v[i]! * field];
    const key = Math.round(u * FINENESS) * 2 ** 26 + Math.round(v * FINENESS);
    const point = points.get(key) ?? { u: 0, v: 0, weight: 0, even: 0, odd: 0 };
    if (point.weight === 0) points.set(key, point);
    point.u += weight * u;
    point.v += weight * v;
    point.weight += weight;
    point.even += weight * real;
    point.odd += sign * weight * imaginary;
    total += weight;
    own += weight * weight * (real * real + imaginary * imaginary);
  }
  const square = meanSquareOverField(pointsOf([...points.values()]));
  // Of samples thinned to a share, pairs are thinned to its square, and each with itself to the share.
  const { share } = samples;
  const whole = (square - own / 2) / share ** 2 + own / 2 / share;
  return total / share / Math.sqrt(whole);
}

/** Of a small square: sums of weight times place, of weight and of the error. */
interface Point {
  u: number;
  v: number;
  weight: number;
  even: number;
  odd: number;
}

function pointsOf(points: readonly Point[]): FieldPoints {
  const held = points.filter(({ weight }) => weight > 0);
  return {
    count: held.length,
    u: Float64Array.from(held, ({ u, weight }) => u / weight),
    v: Float64Array.from(held, ({ v, weight }) => v / weight),
    even: Float64Array.from(held, ({ even }) => even),
    odd: Float64Array.from(held, ({ odd }) => odd),
  };
}
