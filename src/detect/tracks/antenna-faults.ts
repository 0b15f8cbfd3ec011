/** Faults of antennas and baselines that channel averages show, in an order that lets the earlier explain the later. */
import type { Survey } from "../../measure/survey-result.ts";
import type { DetectedEvent } from "../event.ts";
import type { DetectRequest } from "../request.ts";
import { arraysOf } from "./arrays.ts";
import { closureFaults } from "./closure.ts";
import { delaySlopes } from "./delays.ts";
import { gainSteps } from "./gain-steps.ts";
import { type Cleaned, type Grid, gridOf } from "./grid.ts";
import { exchangedHands, takeOutAntennas } from "./hands.ts";
import { samplesOf } from "./make-event.ts";
import { phaseJumps } from "./phase-jumps.ts";
import { phaseNoise } from "./phase-noise.ts";
import { silences } from "./silent.ts";
import { noisyAntennas, weakAntennas, weightMismatches } from "./static-faults.ts";
import { stuckZeros } from "./stuck-zeros.ts";

/**
 * Array by array: antennas are compared with those they have baselines with, at their own frequencies.
 *
 * @param cleaned channel averages without interference, where they are there
 */
export function antennaFaults(
  survey: Survey,
  request: DetectRequest,
  cleaned: Cleaned | null = null,
): DetectedEvent[] {
  const arrays = arraysOf(survey, cleaned);
  const events = arrays.flatMap((one) => faultsOfArray(one.survey, request, one.cleaned));
  const distinct = arrays.length === 1 ? events : once(events);
  const looked = arrays.reduce((sum, one) => sum + one.survey.tracks.cells, 0);
  return looked === survey.tracks.cells ? distinct : distinct.map((event) => counted(survey, event));
}

/** An event that a choice of the baselines showed, with the samples that all of them have. */
function counted(survey: Survey, event: DetectedEvent): DetectedEvent {
  const samples = samplesOf(survey, event.scope);
  const share = event.samples > 0 ? event.outlying / event.samples : 0;
  return { ...event, samples, outlying: Math.round(share * samples) };
}

/** What two setups show alike is one event: the clearer one. */
function once(events: readonly DetectedEvent[]): DetectedEvent[] {
  const clearest = new Map<string, DetectedEvent>();
  for (const event of events) {
    const key = `${event.kind} ${JSON.stringify(event.scope)}`;
    const known = clearest.get(key);
    if (known === undefined || event.significance > known.significance) clearest.set(key, event);
  }
  return [...clearest.values()];
}

function faultsOfArray(survey: Survey, request: DetectRequest, cleaned: Cleaned | null): DetectedEvent[] {
  const grid = gridOf(survey, cleaned);
  if (grid.antennas.length === 0) return [];
  const zeros = stuckZeros(grid);
  if (grid.planes.length === 0) return zeros;
  const hands = exchangedHands(grid);
  takeOutAntennas(grid, hands.antennas);
  const silent = silences(grid);
  const noisy = noisyAntennas(grid);
  const noise = phaseNoise(grid);
  const jumps = phaseJumps(grid, noise.antennas);
  // A mean over a half turn would be next to nothing.
  const steps = gainSteps(jumps.turned);
  const weak = weakAntennas(grid, named(grid, [...hands.events, ...silent, ...steps]));
  const weights = weightMismatches(grid, new Set(noisy.flatMap(({ scope }) => scope.antennas ?? [])));
  return [
    ...zeros,
    ...hands.events,
    ...silent,
    ...noisy,
    ...weak,
    ...noise.events,
    ...jumps.events,
    ...steps,
    ...delaySlopes(grid),
    ...closureFaults(jumps.turned, request),
    ...weights,
  ];
}

/** Indices of the antennas that events name. */
function named(grid: Grid, events: readonly DetectedEvent[]): Set<number> {
  return new Set(
    events.flatMap(({ scope }) => scope.antennas ?? []).map((antenna) => grid.antennas.indexOf(antenna)),
  );
}
