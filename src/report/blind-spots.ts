/** What visvet could not see in a dataset, said plainly in every report. */
import { smallestJump } from "../detect/tracks/smallest-jump.ts";
import type { Plan } from "../imaging/plan.ts";
import { baselinesMet, type Survey } from "../measure/survey-result.ts";
import { formatCount, formatNumber } from "../util/units.ts";

/** With fewer integrations nothing is said of the smallest jump: they are too few for any. */
const FEWEST_INTEGRATIONS = 8;

/** Sentences, the weightiest first. */
export function blindSpots(survey: Survey, plan: Plan): string[] {
  return [
    ...ofAntennas(survey),
    ...ofSamples(survey),
    ...ofJumps(survey),
    ...ofSky(survey, plan),
    "Whether the flux scale, the phase centre and the frequency labels are right can not be told from the file alone.",
  ];
}

function ofAntennas(survey: Survey): string[] {
  const { dataset, baselines, antennasWithData } = survey;
  const spots: string[] = [];
  const { array } = dataset;
  if (!array.fromTable) {
    spots.push("The file has no antenna table: positions, u, v, w and dish diameters could not be checked.");
  } else if (array.antennas.every(({ position }) => position === null)) {
    spots.push("The antenna table has no positions: u, v, w could not be checked against it.");
  }
  if (baselines.length > 0 && antennasWithData.length < 3) {
    spots.push(
      "With fewer than three antennas a fault of an antenna can not be told from one of a baseline.",
    );
  } else if (baselines.length > 0 && antennasWithData.length < 4) {
    spots.push(
      "With three antennas there is one closure phase and no closure amplitude: correlator faults may hide.",
    );
  }
  return spots;
}

function ofSamples(survey: Survey): string[] {
  const { dataset, tracks, times } = survey;
  const spots: string[] = [];
  if (!tracks.w.some((w) => w !== 0 && !Number.isNaN(w))) {
    spots.push(
      "Every w in the file is zero: what the w term does rests on the antenna table, where it has positions.",
    );
  }
  if (!dataset.hasWeights)
    spots.push("The file carries no weights: each sample counts the same, and none is flagged.");
  if (dataset.shape.channels < 3) {
    spots.push(
      "With fewer than three channels a sub-band, noise is measured from one integration to the next, and narrow interference can not be told from the sky.",
    );
  }
  if (times.length < FEWEST_INTEGRATIONS) {
    spots.push(
      `With ${times.length} integrations, phase jumps and changes of gain in time can hardly be told from noise.`,
    );
  }
  if (survey.others !== undefined) {
    const [chosen, all] = [survey.baselines.length, baselinesMet(survey)].map(formatCount);
    spots.push(
      `Of ${all} baselines an even choice of ${chosen} is looked at one by one: faults of single baselines, repeated rows and interference are not looked for on the others. Counts, beams, coverage and noise are of all.`,
    );
  }
  if (tracks.binSeconds > 0) {
    spots.push(
      `There are more rows than memory for each: jumps and drops are dated to ${Math.round(tracks.binSeconds)} s, and repeated rows are not counted.`,
    );
  }
  return spots;
}

function ofJumps(survey: Survey): string[] {
  if (survey.times.length < FEWEST_INTEGRATIONS || survey.antennasWithData.length < 3) return [];
  const degrees = smallestJump(survey);
  return [
    Number.isNaN(degrees)
      ? "Noise and wander hide a phase jump of an antenna, whatever its size."
      : `A lasting phase jump of a typical antenna below ${formatNumber(degrees)} deg would not have been told from noise and wander.`,
  ];
}

function ofSky(survey: Survey, plan: Plan): string[] {
  const spots: string[] = [];
  if (plan.purpose.value !== "calibrator") {
    spots.push(
      "The sky is not known beforehand: errors that are the same at all times and look like structure of the sky can not be told from it.",
    );
  }
  if (survey.dataset.unit !== "Jy") {
    spots.push("The amplitudes are not in Jy: noise and flux are in the file's own unit.");
  }
  return spots;
}
