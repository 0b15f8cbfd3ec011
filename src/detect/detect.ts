/** Every detector in its order. */
import type { Survey } from "../measure/survey-result.ts";
import type { DetectedEvent } from "./event.ts";
import type { DetectRequest } from "./request.ts";
import { withoutShadows } from "./secondary.ts";
import { antennaFaults } from "./tracks/antenna-faults.ts";

/** Most significant first. @throws InputError where the dataset turns out to be malformed */
export async function detect(survey: Survey, request: DetectRequest): Promise<DetectedEvent[]> {
  const antennas = antennaFaults(survey, request);
  return inOrder(withoutShadows(antennas, survey.integration));
}

/** The same order whatever found them first. */
function inOrder(events: readonly DetectedEvent[]): DetectedEvent[] {
  return [...events].sort(
    (a, b) =>
      b.significance - a.significance ||
      a.kind.localeCompare(b.kind) ||
      JSON.stringify(a.scope).localeCompare(JSON.stringify(b.scope)),
  );
}
