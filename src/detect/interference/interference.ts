/**
 * Interference: what stands out of each baseline's background in time and frequency, gathered into few selections.
 * @see Offringa et al. 2010, MNRAS 405, 155 (SumThreshold)
 */
import { EVERYTHING, type Selection } from "../../dataset/selection.ts";
import type { Survey } from "../../measure/survey-result.ts";
import type { DetectedEvent } from "../event.ts";
import type { Band } from "../pass/bands.ts";
import { SINGLE_SCORE } from "../pass/marks.ts";
import { type SecondPass, secondPass } from "../pass/second-pass.ts";
import type { DetectRequest } from "../request.ts";
import { eventOf } from "./describe.ts";
import { type Feature, featuresOf, featuresOfBaselines } from "./features.ts";
import { Grid } from "./grid.ts";
import { groupInTime } from "./group.ts";
import { isProtected, protectedColumns } from "./protect.ts";

/**
 * @param explained samples that antenna faults account for already: not looked at again
 * @throws InputError where the dataset turns out to be malformed
 */
export async function detectInterference(
  survey: Survey,
  request: DetectRequest,
  explained: readonly Selection[],
): Promise<DetectedEvent[]> {
  if (survey.tracks.cells === 0) return [];
  return interferenceOf(
    survey,
    await secondPass(survey, { onProgress: request.onProgress }),
    request,
    explained,
  );
}

/** The same from a second pass that is there already; uses up its marks. */
export function interferenceOf(
  survey: Survey,
  pass: SecondPass,
  request: DetectRequest,
  explained: readonly Selection[],
): DetectedEvent[] {
  const grid = new Grid(survey, pass);
  grid.explain(explained);
  const { subbands, channels } = survey.dataset.shape;
  const bands: readonly Band[] =
    pass.bands.length > 0 ? pass.bands : [{ first: 0, columns: subbands * channels, subband: null }];
  const features: Feature[] = [];
  for (const band of bands) {
    const all = featuresOf(grid, band);
    features.push(...groupInTime([...all, ...featuresOfBaselines(grid, band, all)], grid.steps));
  }
  const events = features
    .filter((feature) => !isProtected(survey, request, feature))
    .map((feature) => eventOf(grid, request, feature));
  const lone = loneSamples(grid, protectedColumns(survey, request));
  return lone === null ? events : [...events, lone];
}

/** Fewer are what features leave at their edges. */
const FEWEST_LONE = 10;

/**
 * Bright samples that no feature took and that stand alone.
 * @param leftOut (channels of all sub-bands) 1 where nothing is looked for
 */
function loneSamples(grid: Grid, leftOut: Uint8Array): DetectedEvent | null {
  const { survey } = grid;
  const { marks } = grid.pass;
  if (marks === null) return null;
  const count = countLone(grid, leftOut);
  if (count < FEWEST_LONE) return null;
  const usable = marks.usable.total();
  const share = count / usable;
  return {
    kind: "lone-samples",
    cause: "samples",
    scope: EVERYTHING,
    flag: null,
    size: SINGLE_SCORE,
    sizeError: Number.NaN,
    unit: "sigma",
    significance: SINGLE_SCORE,
    confidence: 0.9,
    samples: usable,
    outlying: count,
    evidence:
      `${count} samples without neighbours, ${percent(share)} of ${usable}, stand more than ${SINGLE_SCORE} sigma out of the ` +
      `background of their baseline, spread over ${survey.baselines.length} baselines`,
    repair: `clip what stands more than ${SINGLE_SCORE} sigma out of each baseline's background`,
  };
}

/** Bright samples with at most one elevated neighbour of four: more of them tell of a background that does not fit. */
function countLone({ pass: { marks }, survey, polarizations }: Grid, leftOut: Uint8Array): number {
  if (marks === null || marks.bright.total() < FEWEST_LONE) return 0;
  const { tracks, baselines } = survey;
  const { rowSamples } = marks.bright;
  let count = 0;
  for (let b = 0; b < baselines.length; b++) {
    const [first, end] = [tracks.firstCell[b]!, tracks.firstCell[b + 1]!];
    for (let cell = first; cell < end; cell++) {
      marks.bright.each(cell, 0, rowSamples, (sample) => {
        if (leftOut[Math.floor(sample / polarizations)] === 1) return;
        let near = 0;
        if (cell > first && marks.elevated.has(cell - 1, sample)) near += 1;
        if (cell + 1 < end && marks.elevated.has(cell + 1, sample)) near += 1;
        if (sample >= polarizations && marks.elevated.has(cell, sample - polarizations)) near += 1;
        const after = sample + polarizations;
        if (after < rowSamples && marks.elevated.has(cell, after)) near += 1;
        if (near <= 1) count += 1;
      });
    }
  }
  return count;
}

function percent(share: number): string {
  return `${Number((100 * share).toPrecision(2))} %`;
}
