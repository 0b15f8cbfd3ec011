/** Phase against time on the baselines that tell most of an antenna or baseline that an event concerns. */
import { axisY, rectX, ruleX, ruleY, text } from "@observablehq/plot";
import type { DetectedEvent } from "../../detect/event.ts";
import { plainTextWithin } from "../../util/terminal.ts";
import { formatNumber } from "../../util/units.ts";
import type { Check } from "../report.ts";
import type { ScopeWords } from "../scope.ts";
import { COLOUR, drawChart, MARGIN } from "./chart.ts";
import { dots } from "./marks.ts";
import { minutesAfter, timeAxis } from "./ticks.ts";

/** What one chart shows: an antenna or a baseline, and the events that concern it. */
export interface PhaseSubject {
  readonly id: string;
  readonly name: string;
  readonly antenna: number | null;
  readonly baselines: readonly number[];
  readonly events: readonly DetectedEvent[];
}

const PHASE_KINDS: ReadonlySet<string> = new Set([
  "phase-jump",
  "half-turn",
  "delay-slope",
  "phase-noise",
  "closure",
]);
const MOST_SUBJECTS = 4;
const MOST_BASELINES = 4;
/** Dots of a baseline. */
const MOST_DOTS = 500;
const ROW = 92;

/** The antennas and baselines with events in phase, the most significant first; without any, the strongest baselines. */
export function phaseSubjects(check: Check, words: ScopeWords): PhaseSubject[] {
  const strength = baselineStrengths(check);
  const events = check.events
    .filter((event) => PHASE_KINDS.has(event.kind))
    .sort((a, b) => b.significance - a.significance || a.size - b.size);
  const subjects = new Map<
    string,
    { antenna: number | null; baseline: readonly [number, number] | null; events: DetectedEvent[] }
  >();
  for (const event of events) {
    const antenna = event.scope.antennas?.[0] ?? null;
    const baseline = antenna === null ? (event.scope.baselines?.[0] ?? null) : null;
    if (antenna === null && baseline === null) continue;
    const key = antenna === null ? baseline!.join("-") : String(antenna);
    const found = subjects.get(key);
    if (found === undefined) subjects.set(key, { antenna, baseline, events: [event] });
    else found.events.push(event);
  }
  const shown = [...subjects.values()].slice(0, MOST_SUBJECTS).map((subject, i): PhaseSubject => {
    const { antenna, baseline } = subject;
    const name =
      antenna === null ? `baseline ${words.baseline(...baseline!)}` : `antenna ${words.antenna(antenna)}`;
    const of = strongest(check, strength, (a, b) =>
      antenna === null
        ? (a === baseline![0] && b === baseline![1]) || (a === baseline![1] && b === baseline![0])
        : a === antenna || b === antenna,
    );
    return { id: `phase-${i + 1}`, name, antenna, baselines: of, events: subject.events };
  });
  if (shown.length > 0) return shown.filter((subject) => subject.baselines.length > 0);
  const best = strongest(check, strength, () => true);
  return best.length === 0
    ? []
    : [{ id: "phase-1", name: "the strongest baselines", antenna: null, baselines: best, events: [] }];
}

/** (baselines) coherent amplitude over its scatter, summed: how well a baseline shows its phase. */
function baselineStrengths(check: Check): Float64Array {
  const { tracks, baselines } = check.survey;
  const products = check.dataset.shape.subbands * check.dataset.shape.polarizations;
  const strength = new Float64Array(baselines.length);
  for (let cell = 0; cell < tracks.cells; cell++) {
    let sum = 0;
    for (let product = 0; product < products; product++) {
      const at = cell * products + product;
      const size = Math.hypot(tracks.real[at]!, tracks.imag[at]!);
      if (Number.isFinite(size)) sum += size * Math.sqrt(Math.max(0, tracks.weight[at]!));
    }
    strength[tracks.baseline[cell]!]! += sum;
  }
  return strength;
}

function strongest(
  check: Check,
  strength: Float64Array,
  belongs: (a: number, b: number) => boolean,
): number[] {
  return check.survey.baselines
    .map((baseline, i) => ({ i, belongs: belongs(baseline.antenna1, baseline.antenna2) }))
    .filter(({ i, belongs: wanted }) => wanted && strength[i]! > 0)
    .sort((a, b) => strength[b.i]! - strength[a.i]! || a.i - b.i)
    .slice(0, MOST_BASELINES)
    .map(({ i }) => i);
}

export function phaseChart(check: Check, subject: PhaseSubject, words: ScopeWords): string {
  const { survey } = check;
  const start = survey.times[0]!;
  const end = survey.times[survey.times.length - 1]!;
  const axis = timeAxis(start, end);
  const rows = subject.baselines.length;
  const series = subject.baselines.map((baseline) => phasesOf(check, baseline, subject));
  const reach = phaseReach(series.flatMap(({ phase }) => phase));
  // One scale for all rows: row r holds its phases moved down r times by a little more than a row takes.
  const pitch = 2.25 * reach;
  const shift = (row: number) => -pitch * row;
  const spans = subject.events.flatMap((event) =>
    event.scope.time === null ? [] : [{ event, time: event.scope.time }],
  );
  const ticks = series.flatMap((_, row) => [-reach / 2, 0, reach / 2].map((phase) => phase + shift(row)));
  const name = (baseline: number) => {
    const { antenna1, antenna2 } = survey.baselines[baseline]!;
    return antenna2 === subject.antenna
      ? words.baseline(antenna2, antenna1)
      : words.baseline(antenna1, antenna2);
  };
  return drawChart({
    id: subject.id,
    label: `phase against time, ${subject.name}`,
    height: MARGIN.top + MARGIN.bottom + 14 + ROW * rows,
    marginTop: MARGIN.top + 14,
    x: {
      domain: [...axis.domain],
      label: axis.label,
      labelArrow: "none",
      ticks: [...axis.ticks],
      tickFormat: axis.format,
    },
    y: { domain: [shift(rows - 1) - reach * 1.06, reach * 1.06], label: null },
    marks: [
      axisY({
        ticks,
        tickFormat: (value: number) => degreesAt(value, pitch),
        label: "phase (deg)",
        labelArrow: "none",
      }),
      rectX(spans, {
        x1: ({ time }: { time: readonly [number, number] }) =>
          Math.max(axis.domain[0], minutesAfter(axis, time[0])),
        x2: ({ time }: { time: readonly [number, number] }) =>
          Math.min(axis.domain[1], minutesAfter(axis, time[1])),
        fill: COLOUR.suggested,
        fillOpacity: 0.14,
      }),
      ruleX(
        spans
          .flatMap(({ time }) => [...time])
          .map((mjd) => minutesAfter(axis, mjd))
          .filter(inside(axis.domain)),
        {
          stroke: COLOUR.suggested,
          strokeWidth: 1.5,
        },
      ),
      ruleY(
        series.map((_, row) => shift(row)),
        { stroke: COLOUR.faint },
      ),
      ...series.map((points, row) =>
        dots(
          {
            x: points.time.map((mjd) => minutesAfter(axis, mjd)),
            y: points.phase.map((phase) => phase + shift(row)),
          },
          { colour: COLOUR.kept, size: 2.2 },
        ),
      ),
      text(subject.baselines, {
        frameAnchor: "left",
        y: (_: number, row: number) => reach + shift(row),
        dx: 6,
        lineAnchor: "top",
        fill: "var(--ink)",
        fontWeight: 600,
        stroke: "var(--surface)",
        strokeWidth: 4,
        text: (baseline: number) => plainTextWithin(name(baseline), 40),
      }),
      text(spans.slice(0, 6), {
        x: ({ time }: { time: readonly [number, number] }) =>
          Math.max(axis.domain[0], minutesAfter(axis, time[0])),
        frameAnchor: "top",
        dy: -6,
        lineAnchor: "bottom",
        dx: 2,
        textAnchor: "start",
        fill: "var(--suggested-text)",
        fontWeight: 600,
        text: ({ event }: { event: DetectedEvent }) =>
          plainTextWithin(`${formatNumber(event.size)} ${event.unit}`, 24),
      }),
    ],
  });
}

function inside([low, high]: readonly [number, number]): (value: number) => boolean {
  return (value) => value >= low && value <= high;
}

/** Back from the moved scale to a phase of its row. */
function degreesAt(value: number, pitch: number): string {
  return String(Math.round(value + pitch * Math.round(-value / pitch)));
}

/** Half the range of phase that a row shows: all phases, with room for the name of the row. */
function phaseReach(phases: readonly number[]): number {
  const most = phases.reduce((high, phase) => Math.max(high, Math.abs(phase)), 0);
  return [20, 40, 60, 90, 120].find((reach) => most * 1.15 <= reach) ?? 180;
}

/** Phases of a baseline over the products that the events concern, the subject antenna's own sign, degrees. */
function phasesOf(
  check: Check,
  baseline: number,
  subject: PhaseSubject,
): { time: number[]; phase: number[] } {
  const { tracks, baselines } = check.survey;
  const { dataset } = check;
  const { subbands, polarizations } = dataset.shape;
  const wantedSubbands = subject.events[0]?.scope.subbands ?? null;
  const wantedProducts = subject.events[0]?.scope.polarizations ?? null;
  const products: number[] = [];
  for (let subband = 0; subband < subbands; subband++) {
    for (let polarization = 0; polarization < polarizations; polarization++) {
      if (wantedSubbands !== null && !wantedSubbands.includes(subband)) continue;
      if (wantedProducts !== null && !wantedProducts.includes(dataset.polarizations[polarization]!)) continue;
      products.push(subband * polarizations + polarization);
    }
  }
  // As if the subject came first in its baselines, so that its jump has one sign in every row.
  const sign = baselines[baseline]!.antenna2 === subject.antenna ? -1 : 1;
  const from = tracks.firstCell[baseline]!;
  const to = tracks.firstCell[baseline + 1]!;
  const step = Math.max(1, Math.ceil((to - from) / MOST_DOTS));
  const points: { time: number[]; phase: number[] } = { time: [], phase: [] };
  for (let cell = from; cell < to; cell += step) {
    let [real, imag] = [0, 0];
    for (const product of products) {
      const at = cell * subbands * polarizations + product;
      if (!Number.isFinite(tracks.real[at]!) || !Number.isFinite(tracks.imag[at]!)) continue;
      real += tracks.real[at]!;
      imag += tracks.imag[at]!;
    }
    if (real === 0 && imag === 0) continue;
    points.time.push(tracks.time[cell]!);
    points.phase.push((sign * Math.atan2(imag, real) * 180) / Math.PI);
  }
  return points;
}
