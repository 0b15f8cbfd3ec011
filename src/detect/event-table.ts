/** Events as measures: one row an event, and one row that sums up the interference. */

import { table } from "arquero";
import type { Selection } from "../dataset/selection.ts";
import type { Survey } from "../measure/survey-result.ts";
import type { Column, Measure } from "../measure/table.ts";
import { SECONDS_PER_DAY } from "../util/constants.ts";
import { type DetectedEvent, INTERFERENCE_KINDS } from "./event.ts";

type Cell = number | string | null;

/** A column, its unit and meaning, and what an event holds there. */
interface EventColumn extends Column {
  readonly value: (event: DetectedEvent, survey: Survey) => Cell;
}

const column = (name: string, unit: string, meaning: string, value: EventColumn["value"]): EventColumn => ({
  name,
  unit,
  meaning,
  value,
});

/** Null in a column of the scope: all of it, or several that one row cannot name. */
const EVENT_COLUMNS: readonly EventColumn[] = [
  column("kind", "", "what happened, one of the event kinds", (event) => event.kind),
  column(
    "cause",
    "",
    "antenna, baseline, channels, time, samples or correlator: the smallest cause that explains it",
    (event) => event.cause,
  ),
  column("antenna", "", "antenna number; null: all or several", ({ scope }) => only(scope.antennas)),
  column("antenna1", "", "baseline; null: all or several", ({ scope }) => only(scope.baselines)?.[0] ?? null),
  column("antenna2", "", "baseline; null: all or several", ({ scope }) => only(scope.baselines)?.[1] ?? null),
  column("subband", "", "sub-band from 0; null: all or several", ({ scope }) => only(scope.subbands)),
  column("channel_lo", "", "first channel from 0; null: all", ({ scope }) => channelsOf(scope)[0]),
  column("channel_hi", "", "last channel; null: all", ({ scope }) => channelsOf(scope)[1]),
  column(
    "polarization",
    "",
    "products joined by a space; null: all",
    ({ scope }) => scope.polarizations?.join(" ") ?? null,
  ),
  column("time_start", "d", "first integration centre, MJD; null: from the start", ({ scope }) =>
    scope.time === null ? null : scope.time[0],
  ),
  column("time_end", "d", "last integration centre, MJD; null: to the end", ({ scope }) =>
    scope.time === null ? null : scope.time[1],
  ),
  column("field", "", "field id; null: all or several", ({ scope }) => only(scope.fields)),
  column("size", "", "its size, in the unit that the column unit names", (event) => event.size),
  column("size_error", "", "1 sigma error of size; NaN unknown", (event) => event.sizeError),
  column("unit", "", "unit of size: deg, ns, ratio, sigma, fraction", (event) => event.unit),
  column(
    "error",
    "",
    "rms error of the samples concerned as a share of their visibility: |exp(i size) - 1| for phases, |size - 1| for ratios; NaN otherwise",
    errorOf,
  ),
  column("significance", "", "sigmas of the test that found it", (event) => event.significance),
  column("confidence", "", "0 to 1, that a flag takes a fault and not sky", (event) => event.confidence),
  column("samples", "", "samples concerned that were not flagged before", (event) => event.samples),
  column("outlying", "", "of those, the ones found at fault", (event) => event.outlying),
  column("outlying_fraction", "", "outlying over samples; NaN without samples", (event) =>
    ratio(event.outlying, event.samples),
  ),
  column("fraction", "", "samples over the usable samples of the dataset", (event, survey) =>
    ratio(event.samples, survey.totals.usable),
  ),
  column("array_fraction", "", "share of the baselines concerned", (event, survey) =>
    ratio(baselinesOf(event.scope, survey), survey.baselines.length),
  ),
  column("time_fraction", "", "share of the integrations concerned", (event, survey) =>
    ratio(integrationsOf(event.scope, survey), survey.times.length),
  ),
  column("baselines", "", "baselines concerned", (event, survey) => baselinesOf(event.scope, survey)),
  column(
    "antennas",
    "",
    "antennas of the array that have data",
    (_, survey) => survey.antennasWithData.length,
  ),
  column("duration", "s", "from the first to the last integration concerned, both included", durationOf),
  column("flag", "", "1 when a flag would cure it, 0 when not", (event) => (event.flag === null ? 0 : 1)),
  column("repairable", "", "1 when something other than a flag repairs it", (event) =>
    event.repair === null ? 0 : 1,
  ),
  column("repair", "", "that repair in words; null: none", (event) => event.repair),
  column("evidence", "", "what was seen, one sentence", (event) => event.evidence),
];

/** The columns of the measure "event" without what fills them. */
export const EVENT_FORM: readonly Column[] = EVENT_COLUMNS.map(({ name, unit, meaning }) => ({
  name,
  unit,
  meaning,
}));

/**
 * The measures "event" (row i is event i) and "interference" (one row).
 */
export function eventMeasures(survey: Survey, events: readonly DetectedEvent[]): Measure[] {
  return [eventMeasure(survey, events), interferenceMeasure(survey, events)];
}

function eventMeasure(survey: Survey, events: readonly DetectedEvent[]): Measure {
  const data = Object.fromEntries(
    EVENT_COLUMNS.map(({ name, value }) => [name, events.map((event) => value(event, survey))]),
  );
  return {
    name: "event",
    each: "event",
    title: "What happened to samples, attributed to the smallest cause",
    columns: EVENT_FORM,
    scopes: events.map(({ scope }) => scope),
    table: table(
      data,
      EVENT_FORM.map(({ name }) => name),
    ),
  };
}

/** The columns of the measure "interference". */
export const INTERFERENCE_FORM: readonly Column[] = [
  { name: "samples", unit: "", meaning: "usable samples of the dataset" },
  { name: "outlying", unit: "", meaning: "samples found to hold interference" },
  { name: "outlying_fraction", unit: "", meaning: "outlying over samples" },
  { name: "flag_fraction", unit: "", meaning: "samples that the events' flags would take, over samples" },
  { name: "lone_fraction", unit: "", meaning: "outlying samples without neighbours, over samples" },
  { name: "channels", unit: "", meaning: "channels of all sub-bands" },
  { name: "channels_affected", unit: "", meaning: "of those, the ones that an event names" },
  { name: "channels_lost", unit: "", meaning: "of those, the ones at fault all the time" },
  { name: "events", unit: "", meaning: "events of interference" },
];

function interferenceMeasure(survey: Survey, events: readonly DetectedEvent[]): Measure {
  const interference = events.filter((event) => INTERFERENCE_KINDS.has(event.kind));
  const samples = survey.totals.usable;
  const total = (some: readonly DetectedEvent[], of: "outlying" | "samples") =>
    some.reduce((sum, event) => sum + event[of], 0);
  const outlying = total(interference, "outlying");
  const lone = interference.filter((event) => event.kind === "lone-samples");
  const row: Record<string, number> = {
    samples,
    outlying,
    outlying_fraction: ratio(outlying, samples),
    flag_fraction: ratio(
      total(
        interference.filter((event) => event.flag !== null),
        "samples",
      ),
      samples,
    ),
    lone_fraction: ratio(total(lone, "outlying"), samples),
    channels: survey.dataset.shape.subbands * survey.dataset.shape.channels,
    channels_affected: channelCount(survey, interference),
    channels_lost: channelCount(
      survey,
      interference.filter((event) => event.kind === "persistent-line" && event.scope.time === null),
    ),
    events: interference.length,
  };
  const names = INTERFERENCE_FORM.map(({ name }) => name);
  return {
    name: "interference",
    each: "dataset",
    title: "How much of the data interference takes, one row",
    columns: INTERFERENCE_FORM,
    table: table(Object.fromEntries(names.map((name) => [name, [row[name]!]])), names),
  };
}

function only<T>(part: readonly T[] | null): T | null {
  return part?.length === 1 ? part[0]! : null;
}

function channelsOf(scope: Selection): readonly [number | null, number | null] {
  if (scope.channels === null || scope.channels.length === 0) return [null, null];
  return [
    Math.min(...scope.channels.map(([low]) => low)),
    Math.max(...scope.channels.map(([, high]) => high)),
  ];
}

function errorOf({ size, unit }: DetectedEvent): number {
  if (unit === "deg") return 2 * Math.abs(Math.sin((size * Math.PI) / 360));
  return unit === "ratio" ? Math.abs(size - 1) : Number.NaN;
}

function ratio(part: number, whole: number): number {
  return whole > 0 ? part / whole : Number.NaN;
}

/** Baselines of the survey that a selection takes. */
function baselinesOf(scope: Selection, survey: Survey): number {
  const { antennas, baselines } = scope;
  if (antennas === null && baselines === null) return survey.baselines.length;
  const pairs =
    baselines === null ? null : new Set(baselines.flatMap(([a, b]) => [`${a} ${b}`, `${b} ${a}`]));
  return survey.baselines.filter(
    ({ antenna1, antenna2 }) =>
      (antennas === null || antennas.includes(antenna1) || antennas.includes(antenna2)) &&
      (pairs === null || pairs.has(`${antenna1} ${antenna2}`)),
  ).length;
}

function integrationsOf({ time }: Selection, { times }: Survey): number {
  if (time === null) return times.length;
  let count = 0;
  for (const at of times) if (at >= time[0] && at <= time[1]) count++;
  return count;
}

function durationOf({ scope }: DetectedEvent, survey: Survey): number {
  const { times, integration } = survey;
  const span = scope.time ?? (times.length === 0 ? null : [times[0]!, times[times.length - 1]!]);
  if (span === null) return Number.NaN;
  return (span[1] - span[0]) * SECONDS_PER_DAY + (Number.isFinite(integration) ? integration : 0);
}

/** Channels of all sub-bands that any of the events names. */
function channelCount(survey: Survey, events: readonly DetectedEvent[]): number {
  const { subbands, channels } = survey.dataset.shape;
  const named = new Uint8Array(subbands * channels);
  for (const { scope } of events) {
    if (scope.channels === null) continue;
    for (let subband = 0; subband < subbands; subband++) {
      if (scope.subbands !== null && !scope.subbands.includes(subband)) continue;
      for (const [low, high] of scope.channels) {
        named.fill(1, subband * channels + low, subband * channels + Math.min(high, channels - 1) + 1);
      }
    }
  }
  return named.reduce((sum, mark) => sum + mark, 0);
}
