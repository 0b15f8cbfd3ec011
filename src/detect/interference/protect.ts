/** Channels that the plan protects: never flagged for being bright all the time. */
import type { Survey } from "../../measure/survey-result.ts";
import type { DetectRequest } from "../request.ts";
import type { Feature } from "./features.ts";
import { channelsOf } from "./group.ts";

/** Whether a line that is there for long lies wholly or partly in protected channels. */
export function isProtected(survey: Survey, { lineChannels }: DetectRequest, feature: Feature): boolean {
  if (feature.kind !== "persistent-line") return false;
  const { channels } = survey.dataset.shape;
  const [low, high] = channelsOf(feature);
  return lineChannels.some(
    ({ subband, channels: [from, to] }) =>
      low <= subband * channels + to && high >= subband * channels + from,
  );
}
