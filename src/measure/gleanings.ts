/** What the measures need beside the survey's result. */
import type { ChannelCounts } from "./channel-counts.ts";
import type { ChannelNoise } from "./channel-noise.ts";
import type { BaselineCounts } from "./tables/baseline-counts.ts";
import type { Integrations } from "./times.ts";

export interface Gleanings {
  readonly counts: BaselineCounts;
  readonly channels: ChannelCounts;
  /** (subbands x polarizations) */
  readonly channelNoise: readonly ChannelNoise[];
  readonly integrations: Integrations;
  /** any w is not zero */
  readonly wKnown: boolean;
}
