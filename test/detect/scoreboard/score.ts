/** One game: a simulated dataset surveyed and searched, and what was found held against the truth. */

import type { Selection } from "../../../src/dataset/selection.ts";
import { compileSelections } from "../../../src/dataset/selection-matcher.ts";
import { detect } from "../../../src/detect/detect.ts";
import type { DetectedEvent } from "../../../src/detect/event.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import type { Simulated } from "../../../src/simulate/simulate.ts";
import type { TrueFault, Truth } from "../../../src/simulate/truth.ts";
import type { Case } from "./cases.ts";

export interface Score {
  /** share of the samples that faults touched which flags would take; NaN without faults of values */
  readonly recall: number;
  /** share of the samples that flags would take which faults touched; NaN without flags */
  readonly precision: number;
  /** share of all samples that flags would take */
  readonly flagged: number;
  /** selections of all flags */
  readonly selections: number;
  /** faults that an event of an accepted kind names with the right antenna, baseline or channels */
  readonly named: number;
  readonly faults: number;
  /** events that name no fault */
  readonly falseAlarms: number;
  /** of the events that name faults: significance over what a matched filter that knew the fault would have; NaN unknown */
  readonly efficiency: number;
  /** by jump found: integrations its time is off, and its size's error in its own sigmas */
  readonly jumps: readonly { readonly integrations: number; readonly sigmas: number }[];
  readonly events: readonly DetectedEvent[];
}

export async function playCase(game: Case, seed: number): Promise<Score> {
  return score(game.make(seed), game);
}

export async function score(
  { dataset, truth }: Simulated,
  { accept, plan }: Pick<Case, "accept" | "plan">,
): Promise<Score> {
  const survey = await surveyDataset(dataset);
  const events = await detect(survey, {
    purpose: plan?.purpose ?? "continuum",
    lineChannels: plan?.lineChannels ?? [],
  });
  const flags = events.flatMap((event) =>
    event.flag === null ? [] : [event.flag, ...(event.alsoFlag ?? [])],
  );
  const counts = await countSamples({ dataset, truth } as Simulated, flags);
  const naming = truth.faults.map((fault, i) =>
    events.filter((event) => accept[i]!.includes(event.kind) && sameSubject(event, fault)),
  );
  const explained = new Set(naming.flat());
  // A step that stays is cured on either side of it, and lone samples are told, not flagged: no measure of flags.
  const unflaggable = truth.faults.some(
    ({ kind, selection }) =>
      kind === "lone-samples" ||
      ((kind === "phase-jump" || kind === "gain-step") &&
        selection.time !== null &&
        selection.time[1] >= survey.times[survey.times.length - 1]! - 1e-9),
  );
  const efficiencies = await Promise.all(
    truth.faults.map(async (_, i) => {
      const [event] = naming[i]!;
      return event === undefined ? Number.NaN : event.significance / (await matchedSigmas(truth, i));
    }),
  );
  return {
    recall: counts.touched === 0 || unflaggable ? Number.NaN : counts.both / counts.touched,
    precision: counts.flagged === 0 || unflaggable ? Number.NaN : counts.both / counts.flagged,
    flagged: counts.flagged / counts.samples,
    selections: flags.length,
    named: naming.filter((named, i) => named.length > 0 || accept[i]!.length === 0).length,
    faults: truth.faults.length,
    falseAlarms: events.filter((event) => !explained.has(event)).length,
    efficiency: efficiencies.length === 0 ? Number.NaN : Math.min(...efficiencies),
    jumps: truth.faults.flatMap((fault, i) =>
      fault.kind === "phase-jump" && naming[i]!.length > 0
        ? [jumpError(naming[i]![0]!, fault, survey.times)]
        : [],
    ),
    events,
  };
}

/** Interference up to this many sigmas a sample is faint. */
const FAINT = 3;

/**
 * Sigmas at which a matched filter that knew everything but the fault's size (and phases) would see it in Gaussian noise:
 * interference of A sigma adds A^2/2 to the mean 1 of each of n powers whose spread is 1; a phase step D of one antenna on
 * a point source of S/N s a sample moves N - 1 baselines of P products and C channels for n1 and n2 integrations.
 * @see Neyman & Pearson 1933, Phil. Trans. R. Soc. A 231, 289
 */
async function matchedSigmas(truth: Truth, fault: number): Promise<number> {
  const { kind, size, unit, selection } = truth.faults[fault]!;
  if (unit === "sigma") {
    // Scores of brighter samples are cut: their significance is no measure.
    if (size > FAINT || kind === "lone-samples") return Number.NaN;
    const counts = await truth.counts();
    return (size * size * Math.sqrt(counts[fault]!)) / 2;
  }
  const { observation } = truth;
  const { sky, array, gains } = observation.scenario;
  const simple = sky.length === 1 && sky[0]!.major === 0 && gains.bandpass === undefined;
  if (kind !== "phase-jump" || !simple || observation.scenario.atmosphere !== undefined) return Number.NaN;
  const sigma = array.sefd / Math.sqrt(2 * observation.setup.channelWidths[0]! * observation.integration);
  const products = (selection.polarizations ?? observation.polarizations).length;
  const inside = observation.times.filter(
    (time) => selection.time === null || (time >= selection.time[0] && time <= selection.time[1]),
  ).length;
  const outside = observation.times.length - inside;
  const integrations = (inside * outside) / (inside + outside);
  const signal = (sky[0]!.flux / sigma) ** 2 * observation.channels * products;
  return (
    ((Math.abs(size) * Math.PI) / 180) * Math.sqrt(signal * (observation.stations.length - 1) * integrations)
  );
}

/** Samples that faults touched, that flags take, and both. */
async function countSamples(
  { dataset, truth }: Simulated,
  flags: readonly Selection[],
): Promise<{ samples: number; touched: number; flagged: number; both: number }> {
  const matcher = compileSelections(dataset, flags);
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  const taken = new Uint8Array(rowSamples);
  const total = { samples: 0, touched: 0, flagged: 0, both: 0 };
  for await (const block of dataset.blocks({ want: "rows", blockRows: 1024 })) {
    const mask = truth.mask(block);
    for (let row = 0; row < block.rows; row++) {
      taken.fill(0);
      const count = matcher.matchRow(block, row);
      for (let m = 0; m < count; m++) {
        const runs = matcher.runs[matcher.matched[m]!]!;
        for (let r = 0; r < runs.length; r += 2) taken.fill(1, runs[r]!, runs[r + 1]!);
      }
      for (let i = 0; i < rowSamples; i++) {
        const touched = mask[row * rowSamples + i]!;
        total.samples += 1;
        total.touched += touched;
        total.flagged += taken[i]!;
        total.both += touched & taken[i]!;
      }
    }
  }
  return total;
}

/** Whether an event is about what a fault is about: the antenna, the baseline, or channels and times that meet. */
function sameSubject({ scope }: DetectedEvent, { cause, selection }: TrueFault): boolean {
  if (cause === "antenna") return String(scope.antennas) === String(selection.antennas);
  if (cause === "correlator") return String(scope.baselines) === String(selection.baselines);
  return meet(scope.channels, selection.channels) && meet(listed(scope.time), listed(selection.time));
}

type Ranges = readonly (readonly [number, number])[] | null;

function listed(range: readonly [number, number] | null): Ranges {
  return range === null ? null : [range];
}

function meet(a: Ranges, b: Ranges): boolean {
  return (
    a === null ||
    b === null ||
    a.some(([low, high]) => b.some(([from, to]) => low <= to + 1e-9 && from <= high + 1e-9))
  );
}

function jumpError(
  event: DetectedEvent,
  fault: TrueFault,
  times: Float64Array,
): { integrations: number; sigmas: number } {
  const place = (time: number) => times.findIndex((at) => at >= time - 1e-7);
  const truth = fault.selection.time ?? [times[0]!, times[times.length - 1]!];
  const found = event.scope.time ?? [times[0]!, times[times.length - 1]!];
  // A jump that stays may be told by the side before it: its edge is the integration after its end.
  const [from, to] = [place(truth[0]), place(truth[1])];
  const edges = [place(found[0]), place(found[1]) + 1];
  const start = Math.min(...edges.map((edge) => Math.abs(edge - from)));
  const stays = to === times.length - 1;
  const end = stays ? 0 : Math.min(...edges.map((edge) => Math.abs(edge - to - 1)));
  const sign = edges[0] === 0 && stays ? -1 : 1;
  const off = Math.min(Math.abs(sign * event.size - fault.size), Math.abs(event.size - fault.size));
  return { integrations: Math.max(start, end), sigmas: off / event.sizeError };
}
