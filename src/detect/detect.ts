/** Every detector in its order. */
import type { Selection } from "../dataset/selection.ts";
import type { Survey } from "../measure/survey-result.ts";
import type { DetectedEvent, EventKind } from "./event.ts";
import { interferenceOf } from "./interference/interference.ts";
import { spoiltAverages } from "./interference/spoilt.ts";
import { secondPass } from "./pass/second-pass.ts";
import type { DetectRequest } from "./request.ts";
import { withoutShadows } from "./secondary.ts";
import { antennaFaults } from "./tracks/antenna-faults.ts";

/** Most significant first. @throws InputError where the dataset turns out to be malformed */
export async function detect(survey: Survey, request: DetectRequest): Promise<DetectedEvent[]> {
  if (survey.tracks.cells === 0) return [];
  // The pass over the samples first: interference must not turn an antenna's phase.
  const pass = await secondPass(survey, { onProgress: request.onProgress, workers: request.workers });
  // Too few channels for a background leave nothing to put in place of what stands out.
  const { real, imag, slopeReal, slopeImag, count } = pass.clean;
  const spoilt = spoiltAverages(survey, pass);
  const cleaned = pass.bands.length === 0 ? null : { real, imag, slopeReal, slopeImag, count, spoilt };
  const antennas = withoutShadows(antennaFaults(survey, request, cleaned), survey.integration);
  const interference = interferenceOf(survey, pass, request, antennas.flatMap(explainedBy));
  return inOrder(withoutShadows([...antennas, ...interference], survey.integration));
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
