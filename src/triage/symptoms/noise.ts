/** Noise: what the sources leave against what the noise of the data makes. */

import { formatNumber } from "../../util/units.ts";
import { robustRms } from "../sky/peel.ts";
import type { Understanding } from "../sky/understand.ts";
import { beamPixels } from "./beam-area.ts";
import type { Symptom } from "./symptom.ts";

/** More than this much above the prediction, and more than its error allows. */
const LEAST_RATIO = 1.15;
const LEAST_SIGMAS = 5;

export function measureNoise(seen: Understanding): Symptom {
  const rms = robustRms(seen.residual, seen.image.known);
  const predicted = seen.noise * (seen.scale > 0 ? seen.scale : 1);
  const ratio = rms / predicted;
  if (!Number.isFinite(ratio)) {
    return {
      word: "noise",
      present: false,
      text: `The noise of the image is ${formatNumber(rms)} of its unit; the data do not tell what it should be.`,
      measured: { rmsImageUnit: rms },
    };
  }
  const beams = seen.image.known.reduce((sum, one) => sum + one, 0) / beamPixels(seen.lobe);
  const error = ratio / Math.sqrt(Math.max(1, beams));
  const present = ratio > LEAST_RATIO && ratio - 1 > LEAST_SIGMAS * error;
  return {
    word: "noise",
    present,
    text: `Without its sources the image scatters by ${formatNumber(ratio)} times what the noise of the data makes${present ? "" : ", as it should"}.`,
    measured: { rmsImageUnit: rms, predictedImageUnit: predicted, ratio },
  };
}
