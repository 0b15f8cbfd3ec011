/** From the state of a survey to its result: everything in a fixed order, whatever order the rows came in. */
import { InputError } from "../util/errors.ts";
import { finishLevels } from "./levels.ts";
import { surveyMeasures } from "./survey-measures.ts";
import type { SurveyPart } from "./survey-part.ts";
import type { Baseline, Survey, Totals, Tracks } from "./survey-result.ts";
import { BaselineCounts } from "./tables/baseline-counts.ts";
import { findScans, integrationsOf, typicalIntegration } from "./times.ts";

/** Bytes of the levels of one sample of a row on one baseline, and the most that all of them may take. */
const LEVEL_BYTES = 12;
const MOST_LEVEL_BYTES = 8e9;

/**
 * The result of a survey. The part is used up.
 *
 * @throws InputError when the array and band are too large for the memory of any machine at hand
 */
export function finishSurvey(part: SurveyPart): Survey {
  const { dataset, index, gathered } = part;
  const places = index.sortedPlaces();
  requireRoom(part, places.length);
  // The number that the accumulators know each baseline by, in the order of the result.
  const order = new Int32Array(places.length);
  for (const [number, place] of places.entries()) order[place] = number;
  const baselines: readonly Baseline[] = Array.from(order, (number) => index.baselines[number]!);
  const fields = gathered.order.fields;
  const said = gathered.order.integration;
  const integrations = integrationsOf(fields, said);
  const integration = typicalIntegration(said, integrations.centre);
  const bare = gathered.tracks.tracks(places);
  const { scans, ofCell } = findScans(fields, integrations, integration, bare);
  const tracks: Tracks = { ...bare, scan: ofCell };
  const { levels, channelNoise } = finishLevels(
    dataset.shape,
    gathered.amplitudes,
    gathered.noise,
    gathered.baselines,
    order,
    tracks,
  );
  const counts = new BaselineCounts(gathered.baselines, order, gathered.others, index.others);
  const duplicateRows = gathered.tracks.duplicates(bare, integrations.centre);
  const survey = {
    dataset,
    baselines,
    antennasWithData: antennasWithData(baselines, counts),
    tracks,
    levels,
    times: integrations.centre,
    integration,
    scans,
    totals: totalsOf(part, counts, duplicateRows),
    screen: gathered.screen.finish(order),
    ...(index.others.size === 0
      ? {}
      : { others: { baselines: index.others.size, rows: gathered.others.rows() } }),
  };
  const { channels } = gathered;
  const measures = surveyMeasures(survey, {
    counts,
    channels,
    channelNoise,
    integrations,
    wKnown: gathered.order.wKnown,
  });
  part.release();
  return { ...survey, measures };
}

function requireRoom({ dataset }: SurveyPart, baselines: number): void {
  const { subbands, channels, polarizations } = dataset.shape;
  const bytes = baselines * subbands * channels * polarizations * LEVEL_BYTES;
  if (bytes <= MOST_LEVEL_BYTES) return;
  throw new InputError(
    `${baselines} baselines of ${subbands * channels * polarizations} samples a row need ` +
      `${Math.ceil(bytes / 1e9)} GB for their levels: expected at most ${MOST_LEVEL_BYTES / 1e9} GB`,
    {},
    "Average channels or split the sub-bands into several files, and check each",
  );
}

function antennasWithData(baselines: readonly Baseline[], counts: BaselineCounts): number[] {
  const numbers = new Set<number>();
  for (const [b, { antenna1, antenna2 }] of baselines.entries()) {
    if (counts.of(b).usable > 0) numbers.add(antenna1).add(antenna2);
  }
  for (const antenna of counts.otherAntennas) {
    if (counts.ofOthers(antenna).usable > 0) numbers.add(antenna);
  }
  return [...numbers].sort((a, b) => a - b);
}

function totalsOf({ gathered }: SurveyPart, counts: BaselineCounts, duplicateRows: number): Totals {
  const { order, baselines } = gathered;
  const { samples, usable, flagged, bad, zero } = counts.all;
  return {
    rows: order.rows,
    autocorrelationRows: baselines.autocorrelationRows,
    samples,
    usable,
    flagged,
    bad,
    zero,
    duplicateRows,
    outOfOrderRows: order.backwardRows,
    badTimeRows: order.badTimeRows,
    badUvwRows: order.badUvwRows,
  };
}
