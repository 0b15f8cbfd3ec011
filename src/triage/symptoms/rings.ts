/** Rings: the mean of what is left, along circles around each source away from the centre. */

import { formatAngle, formatNumber } from "../../util/units.ts";
import { inBeams } from "../sky/clusters.ts";
import { isExtended, pixelOf } from "../sky/look.ts";
import type { Source } from "../sky/model.ts";
import type { Understanding } from "../sky/understand.ts";
import { beamPixels } from "./beam-area.ts";
import type { Symptom } from "./symptom.ts";

/** Circles, in beams: from the first to the last, so far apart. */
const FIRST = 1.25;
const LAST = 10;
const STEP = 0.5;
/** A source nearer to the centre than this, in beams, tells nothing of what grows with distance. */
const CENTRAL = 2;
const LEAST_SIGNIFICANCE = 6;
const LEAST_SIGMAS = 0.5;
/** A circle with less than this share of its pixels in the image is no ring. */
const LEAST_INSIDE = 0.6;

interface Ring {
  readonly source: Source;
  /** radians */
  readonly radius: number;
  /** image unit, and over the error of the mean */
  readonly height: number;
  readonly significance: number;
}

export function measureRings(seen: Understanding): Symptom {
  const outer = seen.sources.filter(
    (source) => !isExtended(source) && Math.hypot(source.l, source.m) > CENTRAL * seen.beam.major,
  );
  let best: Ring | null = null;
  for (const source of outer) {
    for (const ring of ringsAround(seen, source)) {
      if (best === null || Math.abs(ring.significance) > Math.abs(best.significance)) best = ring;
    }
  }
  if (best === null) {
    return {
      word: "rings",
      present: false,
      text: "No source away from the centre to look for rings around.",
      measured: {},
    };
  }
  const sigmas = best.height / seen.noise;
  const present = Math.abs(best.significance) >= LEAST_SIGNIFICANCE && Math.abs(sigmas) >= LEAST_SIGMAS;
  const distance = Math.hypot(best.source.l, best.source.m);
  const ring = `radius ${formatAngle(best.radius)} around the source ${formatAngle(distance)} from the centre, height ${formatNumber(sigmas)} sigma`;
  return {
    word: "rings",
    present,
    text: present ? `A ring stands out: ${ring}.` : `No ring stands out; the strongest has ${ring}.`,
    measured: {
      radiusRad: best.radius,
      sourceDistanceRad: distance,
      heightSigmas: sigmas,
      significanceSigmas: best.significance,
    },
  };
}

function ringsAround(seen: Understanding, source: Source): Ring[] {
  const { image, lobe, residual } = seen;
  const [x0, y0] = pixelOf(seen, source);
  const count = Math.floor((LAST - FIRST) / STEP);
  const [sum, squares, inside] = [new Float64Array(count), new Float64Array(count), new Float64Array(count)];
  for (let y = 0, at = 0; y < image.height; y++) {
    for (let x = 0; x < image.width; x++, at++) {
      if (image.known[at] === 0) continue;
      const ring = Math.floor((inBeams(lobe, x - x0, y - y0) - FIRST) / STEP);
      if (ring < 0 || ring >= count) continue;
      sum[ring]! += residual[at]!;
      squares[ring]! += residual[at]! ** 2;
      inside[ring]! += 1;
    }
  }
  const area = beamPixels(lobe);
  return Array.from({ length: count }, (_, ring): Ring | null => {
    const [low, high] = [FIRST + ring * STEP, FIRST + (ring + 1) * STEP];
    // An ellipse of one beam across has pi/(8 ln 2) x ... of the beam's area: beams squared over 4.
    const whole = Math.PI * (high * high - low * low) * (area / (Math.PI / (4 * Math.LN2)));
    const n = inside[ring]!;
    if (n < LEAST_INSIDE * whole || n < 8) return null;
    const mean = sum[ring]! / n;
    const scatter = Math.sqrt(Math.max(0, squares[ring]! / n - mean * mean));
    const error = Math.max(scatter, seen.noise || 0) / Math.sqrt(Math.max(1, n / area));
    return {
      source,
      radius: ((low + high) / 2) * seen.beam.major,
      height: mean,
      significance: mean / error,
    };
  }).filter((ring) => ring !== null);
}
