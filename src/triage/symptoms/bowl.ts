/** A bowl: a negative hollow around emission larger than the shortest spacing sees. */

import { formatAngle, formatNumber } from "../../util/units.ts";
import { isExtended, pixelOf } from "../sky/look.ts";
import { widthsOf } from "../sky/patch.ts";
import type { Understanding } from "../sky/understand.ts";
import { beamPixels } from "./beam-area.ts";
import type { Symptom } from "./symptom.ts";

/** The hollow is looked for between these distances, in full widths of the emission. */
const INNER = 0.6;
const OUTER = 1.4;
const LEAST_SIGNIFICANCE = 5;

export function measureBowl(seen: Understanding): Symptom {
  const source = seen.sources.find(isExtended);
  if (source === undefined) {
    return {
      word: "bowl",
      present: false,
      text: "The data show no emission larger than the sources of the image, so no hollow around any.",
      measured: {},
    };
  }
  const { image, frame, residual } = seen;
  const { major } = widthsOf(source.shape);
  const [x0, y0] = pixelOf(seen, source);
  let [sum, count] = [0, 0];
  for (let y = 0, at = 0; y < image.height; y++) {
    for (let x = 0; x < image.width; x++, at++) {
      const distance = (Math.hypot(x - x0, y - y0) * frame.cell) / major;
      if (image.known[at] === 0 || distance < INNER || distance > OUTER) continue;
      sum += residual[at]!;
      count += 1;
    }
  }
  const depth = count === 0 ? Number.NaN : sum / count;
  const sigmas = depth / seen.noise;
  const significance = sigmas * Math.sqrt(count / beamPixels(seen.lobe));
  const present = significance < -LEAST_SIGNIFICANCE && sigmas < -0.5;
  const where = `around the emission of ${formatAngle(major)} at ${formatAngle(Math.hypot(source.l, source.m))} from the centre`;
  return {
    word: "bowl",
    present,
    text: present
      ? `A hollow of ${formatNumber(sigmas)} sigma on the mean lies ${where}.`
      : `No hollow lies ${where} (${formatNumber(sigmas)} sigma on the mean).`,
    measured: { depthSigmas: sigmas, significanceSigmas: significance, widthRad: major },
  };
}
