/** Ghosts: compact spots that are no sources of the data, and whether they stand opposite each other about one. */

import { formatAngle, formatCount, formatNumber } from "../../util/units.ts";
import { inBeams } from "../sky/clusters.ts";
import { pixelOf } from "../sky/look.ts";
import { robustRms } from "../sky/peel.ts";
import type { Understanding } from "../sky/understand.ts";
import type { Symptom } from "./symptom.ts";

/** A spot is higher than this, in the noise that the data give and in the scatter of what is left. */
const LEAST_SIGMAS = 6;
const LEAST_SCATTERS = 4.5;
/** And so many beams from every source. */
const APART = 1.5;
/** Its mirror image about the brightest source has this share of its height, at least. */
const LEAST_MIRROR = 0.6;

interface Spot {
  readonly x: number;
  readonly y: number;
  readonly height: number;
}

export function measureGhosts(seen: Understanding): Symptom {
  const spots = spotsOf(seen);
  const brightest = seen.sources.reduce((best, one) => (one.flux > best.flux ? one : best), seen.sources[0]!);
  const [highest] = spots;
  if (highest === undefined || brightest === undefined) {
    return {
      word: "ghosts",
      present: false,
      text: "No compact spot besides the sources.",
      measured: { spots: 0 },
    };
  }
  const [x0, y0] = pixelOf(seen, brightest);
  const { image, residual } = seen;
  const [mx, my] = [Math.round(2 * x0 - highest.x), Math.round(2 * y0 - highest.y)];
  const inside = mx >= 0 && mx < image.width && my >= 0 && my < image.height;
  const mirror = inside ? residual[my * image.width + mx]! / highest.height : 0;
  const distance = Math.hypot(highest.x - x0, highest.y - y0) * seen.frame.cell;
  const opposite =
    mirror >= LEAST_MIRROR
      ? " Another of the same sign stands opposite: an error of amplitude makes such pairs."
      : mirror <= -LEAST_MIRROR
        ? " One of the other sign stands opposite: an error of phase makes such pairs."
        : "";
  const plural = spots.length === 1 ? "spot besides the sources is" : "spots besides the sources are";
  return {
    word: "ghosts",
    present: true,
    text: `${formatCount(spots.length)} compact ${plural} above ${LEAST_SIGMAS} sigma; the highest, ${formatNumber(highest.height / seen.noise)} sigma, lies ${formatAngle(distance)} from the brightest source.${opposite}`,
    measured: {
      spots: spots.length,
      heightSigmas: highest.height / seen.noise,
      distanceRad: distance,
      mirrorFraction: mirror,
    },
  };
}

/** Peaks of what is left, the highest first. */
function spotsOf(seen: Understanding): Spot[] {
  const { image, residual, lobe } = seen;
  const { width, height, known } = image;
  const floor = Math.max(LEAST_SIGMAS * (seen.noise || 0), LEAST_SCATTERS * robustRms(residual, known));
  const places = seen.sources.map((source) => pixelOf(seen, source));
  const spots: Spot[] = [];
  for (let y = 1; y < height - 1; y++) {
    for (let x = 1; x < width - 1; x++) {
      const value = residual[y * width + x]!;
      if (!(value > floor)) continue;
      let peak = true;
      for (let j = -1; j <= 1 && peak; j++) {
        for (let i = -1; i <= 1; i++) if (residual[(y + j) * width + x + i]! > value) peak = false;
      }
      if (peak && places.every(([px, py]) => inBeams(lobe, x - px, y - py) > APART)) {
        spots.push({ x, y, height: value });
      }
    }
  }
  return spots.sort((a, b) => b.height - a.height);
}
