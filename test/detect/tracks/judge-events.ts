/** A simulated dataset judged by its channel averages, and its events in a short form to compare. */

import type { DetectedEvent } from "../../../src/detect/event.ts";
import { secondPass } from "../../../src/detect/pass/second-pass.ts";
import type { DetectRequest } from "../../../src/detect/request.ts";
import { withoutShadows } from "../../../src/detect/secondary.ts";
import { antennaFaults } from "../../../src/detect/tracks/antenna-faults.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import type { Survey } from "../../../src/measure/survey-result.ts";
import type { Simulated } from "../../../src/simulate/simulate.ts";

export const CONTINUUM: DetectRequest = { purpose: "continuum", lineChannels: [] };

export interface Judged {
  readonly survey: Survey;
  readonly events: readonly DetectedEvent[];
}

export async function judged({ dataset }: Pick<Simulated, "dataset">, request = CONTINUUM): Promise<Judged> {
  const survey = await surveyDataset(dataset);
  const { clean, bands } = await secondPass(survey);
  const events = antennaFaults(survey, request, bands.length === 0 ? null : clean);
  return { survey, events: withoutShadows(events, survey.integration) };
}

/** Integrations between two times of a dataset. */
export function integrationsApart(survey: Survey, a: number, b: number): number {
  return Math.round(((a - b) * 86_400) / survey.integration);
}

/** What an event is about, without its numbers. */
export function subject({ kind, cause, scope }: DetectedEvent): string {
  const { antennas, baselines, polarizations, subbands } = scope;
  const parts: string[] = [kind, cause];
  if (antennas !== null) parts.push(`antenna ${antennas}`);
  if (baselines !== null) parts.push(`baseline ${baselines.map((pair) => pair.join("-"))}`);
  if (polarizations !== null) parts.push(polarizations.join(" "));
  if (subbands !== null) parts.push(`sub-band ${subbands}`);
  return parts.join(", ");
}
