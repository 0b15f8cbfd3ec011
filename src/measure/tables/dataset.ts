/** The `dataset` measure: one row. */

import { SECONDS_PER_DAY } from "../../util/constants.ts";
import { median } from "../../util/statistics.ts";
import { fillMeasure } from "../fill-measure.ts";
import { DATASET } from "../forms.ts";
import type { Gleanings } from "../gleanings.ts";
import { type BareSurvey, baselinesMet } from "../survey-result.ts";
import type { Measure } from "../table.ts";
import { longestPause } from "../times.ts";
import type { BaselineFacts } from "./baseline.ts";
import { gapsOf } from "./gap.ts";
import { parallelNumbers } from "./products.ts";

export function datasetMeasure(
  survey: BareSurvey,
  facts: BaselineFacts,
  { counts, integrations, wKnown }: Gleanings,
): Measure {
  const { dataset, totals, times, scans } = survey;
  const { array, shape } = dataset;
  const withData = new Set(survey.antennasWithData);
  const inTable = array.fromTable ? array.antennas.length : 0;
  const inField = scans.filter((scan, i) => i > 0 && scans[i - 1]!.field === scan.field);
  const duration = times.length === 0 ? Number.NaN : (times.at(-1)! - times[0]!) * SECONDS_PER_DAY;
  const gaps = gapsOf(integrations, survey.integration);
  const row = {
    rows: totals.rows,
    ...counts.all.row,
    antennas_in_table: inTable,
    antennas_with_data: withData.size,
    antennas_without_data: array.fromTable
      ? array.antennas.filter(({ number }) => !withData.has(number)).length
      : 0,
    baselines: baselinesMet(survey),
    integrations: times.length,
    channels: shape.channels,
    subbands: shape.subbands,
    duration_s: duration,
    integration_s: survey.integration,
    gaps: inField.length,
    largest_gap_s: largestStep(times),
    gap_fraction: gaps.reduce((sum, { seconds }) => sum + seconds, 0) / duration,
    missing_integrations: missingIntegrations(times, survey.integration),
    duplicate_rows: totals.duplicateRows,
    duplicate_fraction: totals.duplicateRows / totals.rows,
    out_of_order_rows: totals.outOfOrderRows,
    out_of_order_fraction: totals.outOfOrderRows / totals.rows,
    bad_time_rows: totals.badTimeRows,
    bad_uvw_rows: totals.badUvwRows,
    bad_uvw_fraction: totals.badUvwRows / totals.rows,
    sensitivity_lost: counts.sensitivityLost(parallelNumbers(shape.subbands, dataset.polarizations)),
    noise_sigma: median(facts.sigma),
    amplitude_median: median(facts.amplitude),
    weight_scale: median(facts.weightScatter) ** 2,
    header_faults: dataset.notes.filter(({ kind }) => kind === "fault").length,
    has_weights: dataset.hasWeights ? 1 : 0,
    w_known: wKnown ? 1 : 0,
    positions_known: array.antennas.some(({ position }) => position !== null) ? 1 : 0,
    autocorrelation_rows: totals.autocorrelationRows,
  };
  return fillMeasure(DATASET, [row]);
}

/** Longest time between neighbouring integrations, seconds; 0 of fewer than two. */
function largestStep(times: Float64Array): number {
  let largest = 0;
  for (let i = 1; i < times.length; i++) largest = Math.max(largest, times[i]! - times[i - 1]!);
  return largest * SECONDS_PER_DAY;
}

/** Integrations that would fit between those there are, but for the gaps. */
function missingIntegrations(times: Float64Array, integration: number): number {
  if (!(integration > 0)) return 0;
  let missing = 0;
  const longest = longestPause(integration);
  for (let i = 1; i < times.length; i++) {
    const seconds = (times[i]! - times[i - 1]!) * SECONDS_PER_DAY;
    if (seconds < longest) missing += Math.max(0, Math.round(seconds / integration) - 1);
  }
  return missing;
}
