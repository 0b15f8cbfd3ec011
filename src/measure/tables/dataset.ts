/** The `dataset` measure: one row. */

import { SECONDS_A_DAY } from "../../util/constants.ts";
import { median } from "../../util/statistics.ts";
import { fillMeasure } from "../fill-measure.ts";
import { DATASET } from "../forms.ts";
import type { BareSurvey } from "../survey-result.ts";
import type { Measure } from "../table.ts";
import { Counts } from "./counts.ts";
import { parallelProducts } from "./products.ts";
import { largestGap } from "./time.ts";

export function datasetMeasure(survey: BareSurvey): Measure {
  const { dataset, totals, times, tracks, scans } = survey;
  const { array, shape } = dataset;
  const counts = new Counts();
  Object.assign(counts, {
    usable: totals.usable,
    flagged: totals.flagged,
    bad: totals.bad,
    zero: totals.zero,
  });
  const withData = new Set(survey.antennasWithData);
  const inTable = array.fromTable ? array.antennas.length : 0;
  const gaps = scans.filter((scan, i) => i > 0 && scans[i - 1]!.field === scan.field);
  const parallel = parallelProducts(dataset.polarizations);
  const ofParallel = (values: Float32Array) =>
    median(values.filter((_, i) => parallel[i % shape.polarizations]));
  const room = counts.samples - counts.zero;
  const row = {
    rows: totals.rows,
    ...counts.row,
    antennas_in_table: inTable,
    antennas_with_data: withData.size,
    antennas_without_data: array.fromTable
      ? array.antennas.filter(({ number }) => !withData.has(number)).length
      : 0,
    baselines: survey.baselines.length,
    integrations: times.length,
    channels: shape.channels,
    subbands: shape.subbands,
    duration_s: times.length === 0 ? Number.NaN : (times.at(-1)! - times[0]!) * SECONDS_A_DAY,
    integration_s: survey.integration,
    gaps: gaps.length,
    largest_gap_s: largestGap(times),
    duplicate_rows: totals.duplicateRows,
    duplicate_fraction: totals.duplicateRows / totals.rows,
    out_of_order_rows: totals.outOfOrderRows,
    out_of_order_fraction: totals.outOfOrderRows / totals.rows,
    bad_time_rows: totals.badTimeRows,
    bad_uvw_rows: totals.badUvwRows,
    bad_uvw_fraction: totals.badUvwRows / totals.rows,
    sensitivity_lost: 1 - Math.sqrt(counts.usable / room),
    noise_sigma: ofParallel(survey.levels.sigma),
    amplitude_median: ofParallel(survey.levels.median),
    header_faults: dataset.notes.filter(({ kind }) => kind === "fault").length,
    has_weights: dataset.hasWeights ? 1 : 0,
    w_known: tracks.w.some((w) => w !== 0 && !Number.isNaN(w)) ? 1 : 0,
    positions_known: array.antennas.some(({ position }) => position !== null) ? 1 : 0,
    autocorrelation_rows: totals.autocorrelationRows,
  };
  return fillMeasure(DATASET, [row]);
}
