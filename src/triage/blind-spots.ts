/** What triage could not see, said plainly. */
import { formatAngle, formatNumber, formatPercent } from "../util/units.ts";
import type { Investigation } from "./investigate.ts";

/** Fluxes of image and data agree within this. */
const SCALE_AGREES = 0.1;

/** Sentences, the weightiest first. */
export function triageBlindSpots({ seen, ranking }: Investigation): string[] {
  const { image, frame, atoms } = seen;
  const spots: string[] = [];
  if (!seen.held) {
    spots.push(
      "The data do not hold the sources of the image, perhaps because it was made after a calibration that the data do not have: nothing is told from their values.",
    );
  }
  if (seen.sources.length === 0) {
    spots.push(
      "No source stands above the noise: what distance from the centre or an antenna's gain does to sources is not seen.",
    );
  }
  const aliased = beyond(seen);
  if (aliased > 0) {
    spots.push(
      `The pixels are too large for the longest spacings: ${formatPercent(aliased)} of the samples are not seen in the image.`,
    );
  }
  if (frame.offset > 1e-6) {
    spots.push(
      `The image is centred ${formatAngle(frame.offset)} from the phase centre: samples were turned to it, smearing by channels and integrations is reckoned from the image's centre.`,
    );
  }
  if (seen.held && Math.abs(seen.scale - 1) > SCALE_AGREES) {
    spots.push(
      `Sources in the image are ${formatNumber(seen.scale)} times as bright as in the data: either the scales differ or flux was lost.`,
    );
  }
  if (atoms.conjugated) {
    spots.push("The phases of the data have the sign opposite to the usual one and were read so.");
  }
  if (!(seen.noise > 0))
    spots.push("The noise of the data is unknown: nothing is said of noise above prediction.");
  const excess = ranking.evidence.power - ranking.evidence.noisePower;
  const left =
    1 - [...ranking.sampleFaults, ...ranking.imagerFaults].reduce((sum, { share }) => sum + share, 0);
  if (excess > 0.2 * ranking.evidence.power && left > 0.2) {
    spots.push(
      `${formatPercent(Math.min(1, left))} of what is wrong beyond noise is accounted for by none of these causes: errors of deconvolution, many small errors of calibration and the primary beam's turning are not told apart here.`,
    );
  }
  spots.push(
    `The weighting of the image is not in it: ${seen.weighting.kind} was ${seen.deconvolved ? "assumed" : "fitted"}. A cause common to all antennas and times looks like sky.`,
  );
  return [...spots, ...image.notes];
}

/** Share of the samples that the pixels do not sample. */
function beyond({ weights }: Investigation["seen"]): number {
  return weights.reduce((count, weight) => count + (weight > 0 ? 0 : 1), 0) / Math.max(1, weights.length);
}
