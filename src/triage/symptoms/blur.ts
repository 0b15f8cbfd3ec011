/** Blur: how much wider sources are than the beam, along the direction to the centre and across it. */

import { formatAngle, formatNumber } from "../../util/units.ts";
import { cholesky, solveCholesky } from "../linear.ts";
import { isExtended, pixelOf } from "../sky/look.ts";
import type { Source } from "../sky/model.ts";
import type { Understanding } from "../sky/understand.ts";
import { beamPixels } from "./beam-area.ts";
import type { Symptom } from "./symptom.ts";

/** Pixels of a source: those within this many beams' half widths. */
const REACH = 2;
const LEAST_SIGNIFICANCE = 5;
/** One direction is blurred where it is so many times as much as the other. */
const LEAST_RATIO = 1.5;
/** Blur is there where a source at the edge would be so much wider than the beam, as a share of it. */
const LEAST_WIDTH = 0.02;
const FWHM = Math.sqrt(8 * Math.LN2);

/** Second moments that a source has more than the beam, radians squared, with their errors. */
interface Widening {
  readonly distance: number;
  readonly radial: number;
  readonly tangential: number;
  readonly error: number;
}

interface Trend {
  /** second moment over the distance squared */
  readonly slope: number;
  readonly significance: number;
}

export function measureBlur(seen: Understanding): [Symptom, Symptom] {
  const widenings = seen.sources.flatMap((source) => {
    const found = wideningOf(seen, source);
    return found === null ? [] : [found];
  });
  const radial = trendOf(widenings, ({ radial: value }) => value);
  const tangential = trendOf(widenings, ({ tangential: value }) => value);
  return [
    blurSymptom(seen, "radial-blur", widenings, radial, tangential),
    blurSymptom(seen, "tangential-blur", widenings, tangential, radial),
  ];
}

function blurSymptom(
  seen: Understanding,
  word: "radial-blur" | "tangential-blur",
  widenings: readonly Widening[],
  own: Trend,
  other: Trend,
): Symptom {
  const direction = word === "radial-blur" ? "towards the centre" : "around the centre";
  if (widenings.length === 0) {
    return { word, present: false, text: `No source to measure its width ${direction} on.`, measured: {} };
  }
  const farthest = Math.max(...widenings.map(({ distance }) => distance));
  const width = FWHM * Math.sqrt(Math.max(0, own.slope)) * farthest;
  const present =
    own.significance >= LEAST_SIGNIFICANCE &&
    own.slope > LEAST_RATIO * Math.abs(other.slope) &&
    Math.hypot(seen.beam.major, width) > (1 + LEAST_WIDTH / 2) * seen.beam.major;
  return {
    word,
    present,
    text: present
      ? `Sources widen ${direction} with distance: by ${formatAngle(width)} at ${formatAngle(farthest)}, beside a beam of ${formatAngle(seen.beam.major)}.`
      : `Sources are not wider ${direction} the farther out they are (${formatNumber(own.significance)} sigma).`,
    measured: {
      widthRad: width,
      distanceRad: farthest,
      slope: own.slope,
      significanceSigmas: own.significance,
    },
  };
}

/** Least squares of the second moments by the distance squared. */
function trendOf(widenings: readonly Widening[], value: (widening: Widening) => number): Trend {
  let [product, own] = [0, 0];
  for (const widening of widenings) {
    const weight = 1 / widening.error ** 2;
    product += weight * widening.distance ** 2 * value(widening);
    own += weight * widening.distance ** 4;
  }
  if (!(own > 0)) return { slope: 0, significance: 0 };
  return { slope: product / own, significance: product / Math.sqrt(own) };
}

/**
 * What is left around a source as height and second derivatives of the beam along the two directions: a beam widened by
 * s^2 adds S s^2/2 times its second derivative.
 */
function wideningOf(seen: Understanding, source: Source): Widening | null {
  const { image, lobe, frame, residual } = seen;
  const distance = Math.hypot(source.l, source.m);
  if (isExtended(source) || !(distance > seen.beam.major)) return null;
  const [x0, y0] = pixelOf(seen, source);
  // Unit vectors towards and around the centre, in pixels a radian.
  const [a, b, c, d] = frame.matrix;
  const determinant = a * d - b * c;
  const [p, q] = [source.l / distance, source.m / distance];
  const radial = [(d * p - b * q) / determinant, (a * q - c * p) / determinant] as const;
  const tangential = [(-d * q - b * p) / determinant, (a * p + c * q) / determinant] as const;
  const second = (x: number, y: number, [ex, ey]: readonly [number, number]) => {
    const along = 2 * (lobe.a * x * ex + lobe.b * (x * ey + y * ex) + lobe.c * y * ey);
    const curve = 2 * (lobe.a * ex * ex + 2 * lobe.b * ex * ey + lobe.c * ey * ey);
    return along * along - curve;
  };
  const n = 3;
  const matrix = new Float64Array(n * n);
  const right = new Float64Array(n);
  const reach = Math.ceil(REACH * Math.sqrt(beamPixels(lobe)));
  for (let y = Math.max(0, Math.round(y0) - reach); y <= Math.min(image.height - 1, y0 + reach); y++) {
    for (let x = Math.max(0, Math.round(x0) - reach); x <= Math.min(image.width - 1, x0 + reach); x++) {
      const at = y * image.width + x;
      if (image.known[at] === 0) continue;
      const [dx, dy] = [x - x0, y - y0];
      const beam = Math.exp(-(lobe.a * dx * dx + 2 * lobe.b * dx * dy + lobe.c * dy * dy));
      const row = [beam, beam * second(dx, dy, radial), beam * second(dx, dy, tangential)];
      for (let i = 0; i < n; i++) {
        right[i]! += row[i]! * residual[at]!;
        for (let j = 0; j < n; j++) matrix[i * n + j]! += row[i]! * row[j]!;
      }
    }
  }
  const lower = cholesky(matrix, n);
  const [, first, other] = solveCholesky(lower, right);
  const unit = solveCholesky(lower, Float64Array.of(0, 1, 0))[1]!;
  const flux = source.flux * (seen.scale > 0 ? seen.scale : 1);
  const error = ((2 * seen.noise) / flux) * Math.sqrt(Math.max(0, unit) * beamPixels(lobe));
  if (!(error > 0)) return null;
  return { distance, radial: (2 * first!) / flux, tangential: (2 * other!) / flux, error };
}
