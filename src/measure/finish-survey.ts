/** From the state of a survey to its result: everything in a fixed order, whatever order the rows came in. */
import { finishTracks } from "./finish-tracks.ts";
import { finishLevels } from "./levels.ts";
import { findScans, typicalIntegration } from "./scans.ts";
import { surveyMeasures } from "./survey-measures.ts";
import type { SurveyPart } from "./survey-part.ts";
import type { Baseline, Survey, Totals, Tracks } from "./survey-result.ts";
import { TIME_STEP_DAYS } from "./time-order.ts";

export function finishSurvey(part: SurveyPart): Survey {
  const { dataset, settings, index } = part;
  const places = index.sortedPlaces();
  const baselines = new Array<Baseline>(places.length);
  for (const [i, baseline] of index.baselines.entries()) baselines[places[i]!] = baseline;
  const times = part.order.integrations;
  const bare = finishTracks(part.tracks, places, settings.binSeconds);
  const integration = typicalIntegration(bare.integration, times);
  const { scans, ofCell } = findScans(bare.time, bare.field, integration);
  const tracks: Tracks = { ...bare, scan: ofCell };
  const levels = finishLevels(part, places, tracks);
  const result = {
    dataset,
    baselines,
    antennasWithData: antennasWithData(baselines, tracks, part.tracks.products),
    tracks,
    levels,
    times,
    integration,
    scans,
    totals: totalsOf(part, tracks),
  };
  return { ...result, measures: surveyMeasures(result, part) };
}

function antennasWithData(baselines: readonly Baseline[], tracks: Tracks, products: number): number[] {
  const numbers = new Set<number>();
  for (const [b, { antenna1, antenna2 }] of baselines.entries()) {
    const [first, last] = [tracks.firstCell[b]! * products, tracks.firstCell[b + 1]! * products];
    if (!tracks.usable.subarray(first, last).some((count) => count > 0)) continue;
    numbers.add(antenna1).add(antenna2);
  }
  return [...numbers].sort((a, b) => a - b);
}

function totalsOf(part: SurveyPart, tracks: Tracks): Totals {
  const { order, channels } = part;
  const sum = (counts: Uint32Array) => counts.reduce((total, count) => total + count, 0);
  const [usable, flagged, bad, zero] = [tracks.usable, tracks.flagged, tracks.bad, tracks.zero].map(sum) as [
    number,
    number,
    number,
    number,
  ];
  return {
    rows: order.rows,
    autocorrelationRows: channels.autocorrelationRows,
    samples: usable + flagged + bad + zero,
    usable,
    flagged,
    bad,
    zero,
    duplicateRows: tracks.binSeconds > 0 ? Number.NaN : duplicates(tracks),
    outOfOrderRows: order.backwardRows,
    badTimeRows: order.badTimeRows,
    badUvwRows: order.badUvwRows,
  };
}

/** Cells, one a row, that repeat the one before them in everything but their samples. */
function duplicates(tracks: Tracks): number {
  const { baseline, time, field, setup, subarray } = tracks;
  let count = 0;
  for (let cell = 1; cell < tracks.cells; cell++) {
    const before = cell - 1;
    const same =
      baseline[cell] === baseline[before] &&
      time[cell]! - time[before]! <= TIME_STEP_DAYS &&
      field[cell] === field[before] &&
      setup[cell] === setup[before] &&
      subarray[cell] === subarray[before];
    if (same) count += 1;
  }
  return count;
}
