/** Channels that the plan protects: what is there all the time is the line, and what else is there is not flagged. */
import type { Survey } from "../../measure/survey-result.ts";
import type { DetectRequest } from "../request.ts";
import { amplitudeOf } from "./amplitude.ts";
import type { Feature } from "./features.ts";
import { channelsOf } from "./group.ts";

/** Fainter than this, in sigmas a sample, or on a few baselines only, what comes and goes in protected channels is the line. */
const LEAST_IN_LINE = 3;

/** Whether a line that is there for long lies wholly or partly in protected channels, or something faint wholly. */
export function isProtected(survey: Survey, request: DetectRequest, feature: Feature): boolean {
  if (feature.kind !== "persistent-line") {
    const faint = feature.who.kind === "listed" || amplitudeOf(feature) < LEAST_IN_LINE;
    return faint && liesInProtected(survey, request, feature);
  }
  const { lineChannels } = request;
  const { channels } = survey.dataset.shape;
  const [low, high] = channelsOf(feature);
  return lineChannels.some(
    ({ subband, channels: [from, to] }) =>
      low <= subband * channels + to && high >= subband * channels + from,
  );
}

/** Whether a feature lies within protected channels altogether. */
export function liesInProtected(survey: Survey, request: DetectRequest, feature: Feature): boolean {
  const [low, high] = channelsOf(feature);
  const columns = protectedColumns(survey, request);
  return columns.subarray(low, high + 1).every((mark) => mark === 1);
}

/** (channels of all sub-bands) 1 where protected */
export function protectedColumns(survey: Survey, { lineChannels }: DetectRequest): Uint8Array {
  const { subbands, channels } = survey.dataset.shape;
  const columns = new Uint8Array(subbands * channels);
  for (const {
    subband,
    channels: [from, to],
  } of lineChannels) {
    if (subband >= subbands) continue;
    columns.fill(1, subband * channels + from, subband * channels + Math.min(to, channels - 1) + 1);
  }
  return columns;
}
