/** Every detector in its order. */
import type { Selection } from "../dataset/selection.ts";
import type { Survey } from "../measure/survey-result.ts";
import type { DetectedEvent, EventKind } from "./event.ts";
import { interferenceOf } from "./interference/interference.ts";
import { spoiltAverages } from "./interference/spoilt.ts";
import { wholeChoice } from "./pass/choice.ts";
import { type SecondPass, secondPass } from "./pass/second-pass.ts";
import type { DetectRequest } from "./request.ts";
import { withoutShadows } from "./secondary.ts";
import { antennaFaults } from "./tracks/antenna-faults.ts";

/** Most significant first. @throws InputError where the dataset turns out to be malformed */
export async function detect(survey: Survey, request: DetectRequest): Promise<DetectedEvent[]> {
  if (survey.tracks.cells === 0) return [];
  // The pass over the samples first: interference must not turn an antenna's phase.
  let pass = await secondPass(survey, request);
  let faults = faultsBy(survey, request, pass);
  if (mayBeOfTheSky(faults) && !pass.choice.isWhole && pass.choice.cut.tiles === 1) {
    pass = await secondPass(survey, { ...request, choice: wholeChoice(survey) });
    faults = faultsBy(survey, request, pass);
  }
  const antennas = withoutShadows(faults, survey.integration);
  const interference = interferenceOf(survey, pass, request, antennas.flatMap(explainedBy));
  return inOrder(withoutShadows([...antennas, ...interference], survey.integration));
}

function faultsBy(survey: Survey, request: DetectRequest, pass: SecondPass): DetectedEvent[] {
  // Too few channels for a background leave nothing to put in place of what stands out.
  const { real, imag, slopeReal, slopeImag, count } = pass.clean;
  const spoilt = spoiltAverages(survey, pass);
  const cleaned = pass.bands.length === 0 ? null : { real, imag, slopeReal, slopeImag, count, spoilt };
  return antennaFaults(survey, request, cleaned);
}

/** Kinds that a bright source far out may look like for a while, until it is taken out of the averages. */
const LIKE_THE_SKY: ReadonlySet<EventKind> = new Set<EventKind>(["delay-slope", "phase-jump", "gain-step"]);

function mayBeOfTheSky(faults: readonly DetectedEvent[]): boolean {
  return faults.some(({ kind }) => LIKE_THE_SKY.has(kind));
}

/** Kinds whose samples hold amplitudes that are no interference's doing. */
const EXPLAIN: ReadonlySet<EventKind> = new Set<EventKind>([
  "silent-antenna",
  "stuck-zeros",
  "dropout",
  "hand-off",
  "exchanged-hands",
]);

function explainedBy({ kind, flag, alsoFlag }: DetectedEvent): Selection[] {
  return EXPLAIN.has(kind) && flag !== null ? [flag, ...(alsoFlag ?? [])] : [];
}

/** The same order whatever found them first. */
function inOrder(events: readonly DetectedEvent[]): DetectedEvent[] {
  const text = (event: DetectedEvent) => `${event.kind} ${JSON.stringify(event.scope)}`;
  return [...events].sort(
    (a, b) => b.significance - a.significance || (text(a) < text(b) ? -1 : text(a) > text(b) ? 1 : 0),
  );
}
