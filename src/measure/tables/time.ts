/** The measures along the time: `field`, `scan` and `integration`. */
import { SECONDS_PER_DAY } from "../../util/constants.ts";
import { median } from "../../util/statistics.ts";
import { fillMeasure } from "../fill-measure.ts";
import { FIELD, INTEGRATION, SCAN } from "../forms.ts";
import type { BareSurvey } from "../survey-result.ts";
import type { Measure } from "../table.ts";
import { TIME_STEP_DAYS } from "../time-order.ts";
import { type Integrations, nearestTime } from "../times.ts";
import type { BaselineFacts } from "./baseline.ts";
import { countCells } from "./counts.ts";
import { parallelProducts } from "./products.ts";

const productsOf = (survey: BareSurvey) => survey.dataset.shape.subbands * survey.dataset.shape.polarizations;

/** Median amplitude of the parallel hands of the cells of each group. */
function amplitudes(
  survey: BareSurvey,
  groups: number,
  groupOf: (cell: number) => number,
  over?: Float64Array,
) {
  const { tracks, dataset } = survey;
  const products = productsOf(survey);
  const parallel = parallelProducts(dataset.polarizations);
  const values = Array.from({ length: groups }, (): number[] => []);
  for (let cell = 0; cell < tracks.cells; cell++) {
    const list = values[groupOf(cell)];
    if (list === undefined) continue;
    const scale = over === undefined ? 1 : over[tracks.baseline[cell]!]!;
    for (let k = 0; k < products; k++) {
      const i = cell * products + k;
      if (parallel[k % dataset.shape.polarizations] && tracks.usable[i]! > 0)
        list.push(tracks.amplitude[i]! / scale);
    }
  }
  return values.map(median);
}

export function fieldMeasure(survey: BareSurvey): Measure {
  const { tracks, dataset, times, integration } = survey;
  const ids = [...new Set(tracks.field)].sort((a, b) => a - b);
  const place = new Map(ids.map((id, i) => [id, i]));
  const groupOf = (cell: number) => place.get(tracks.field[cell]!)!;
  const counts = countCells(tracks, productsOf(survey), ids.length, (cell) => [groupOf(cell)]);
  const typical = amplitudes(survey, ids.length, groupOf);
  const integrations = distinctTimes(survey, ids.length, groupOf, times);
  const rows = ids.map((field, i) => ({
    field,
    name: dataset.fields.find(({ id }) => id === field)?.name ?? null,
    integrations: integrations[i]!,
    time_s: integrations[i]! * integration,
    ...counts[i]!.row,
    amplitude_median: typical[i]!,
  }));
  return fillMeasure(FIELD, rows);
}

/** How many of the array's integrations the cells of each group take. */
function distinctTimes(
  survey: BareSurvey,
  groups: number,
  groupOf: (cell: number) => number,
  times: Float64Array,
) {
  const seen = Array.from({ length: groups }, () => new Set<number>());
  for (let cell = 0; cell < survey.tracks.cells; cell++) {
    const at = nearestTime(times, survey.tracks.time[cell]!);
    if (at >= 0) seen[groupOf(cell)]?.add(at);
  }
  return seen.map((set) => set.size);
}

export function scanMeasure(survey: BareSurvey): Measure {
  const { tracks, scans, times } = survey;
  const groupOf = (cell: number) => tracks.scan[cell]!;
  const counts = countCells(tracks, productsOf(survey), scans.length, (cell) => [groupOf(cell)]);
  const integrations = distinctTimes(survey, scans.length, groupOf, times);
  const typicalFlagged = median(counts.map(({ flaggedFraction }) => flaggedFraction));
  const rows = scans.map(({ start, end, field }, scan) => {
    const before = scans[scan - 1];
    return {
      scan,
      field,
      time_start: start,
      time_end: end,
      integrations: integrations[scan]!,
      ...counts[scan]!.row,
      flagged_beyond_typical: counts[scan]!.flaggedFraction - typicalFlagged,
      gap_before_s: before === undefined ? Number.NaN : Math.max(0, start - before.end) * SECONDS_PER_DAY,
      gap_in_field: before?.field === field && start > before.end + TIME_STEP_DAYS ? 1 : 0,
    };
  });
  return fillMeasure(SCAN, rows);
}

export function integrationMeasure(
  survey: BareSurvey,
  facts: BaselineFacts,
  { earliest, latest }: Integrations,
): Measure {
  const { tracks, times } = survey;
  const of = Int32Array.from(tracks.time, (time) => nearestTime(times, time));
  const counts = countCells(tracks, productsOf(survey), times.length, (cell) => [of[cell]!]);
  const typical = amplitudes(survey, times.length, (cell) => of[cell]!, facts.amplitude);
  const scan = new Int32Array(times.length).fill(-1);
  const baselines = new Int32Array(times.length);
  for (let cell = 0; cell < tracks.cells; cell++) {
    const at = of[cell]!;
    if (at < 0) continue;
    scan[at] = tracks.scan[cell]!;
    baselines[at]! += 1;
  }
  const rows = Array.from(times, (_, i) => ({
    // From its earliest row to its latest, so that the range selects all of them.
    time_start: earliest[i]!,
    time_end: latest[i]!,
    scan: scan[i]!,
    baselines: baselines[i]!,
    ...counts[i]!.row,
    amplitude_median: typical[i]!,
  }));
  return fillMeasure(INTEGRATION, rows);
}
