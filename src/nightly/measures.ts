/** What trends are sought in: the measures of a night, how they are taken and how they are said. */
import type { SeriesKind } from "./history/records.ts";

export interface TrendMeasure {
  readonly kind: SeriesKind;
  readonly key: string;
  /** "the amplitude" */
  readonly title: string;
  /** ratios are followed by their logarithm, so that a loss of 1 % a night is a straight line */
  readonly logarithmic: boolean;
  /** changes below this are none, in ln or in the measure's own unit */
  readonly least: number;
}

export const TREND_MEASURES: readonly TrendMeasure[] = [
  measure("antenna", "amplitude_ratio", "amplitude", true, 0.01),
  measure("antenna", "noise_ratio", "noise", true, 0.01),
  measure("antenna", "coherence_ratio", "coherence", true, 0.005),
  measure("antenna", "hand_ratio", "ratio of the two hands", true, 0.01),
  measure("antenna", "flagged_fraction", "share flagged", false, 0.005),
  measure("baseline group", "noise_ratio", "noise", true, 0.01),
  measure("baseline group", "coherence", "coherence", true, 0.005),
  measure("baseline group", "flagged_fraction", "share flagged", false, 0.005),
  measure("channel", "noise_ratio", "noise", true, 0.01),
  measure("channel", "amplitude_ratio", "amplitude", true, 0.01),
  measure("channel", "interference", "share of the time with interference", false, 0.005),
  measure("rule", "severity", "severity", false, 0.02),
];

function measure(
  kind: SeriesKind,
  key: string,
  title: string,
  logarithmic: boolean,
  least: number,
): TrendMeasure {
  return { kind, key, title, logarithmic, least };
}

export function trendMeasure(kind: SeriesKind, key: string): TrendMeasure | undefined {
  return TREND_MEASURES.find((known) => known.kind === kind && known.key === key);
}

/** A value as charts take it; NaN where it has none. */
export function chartValue({ logarithmic }: TrendMeasure, value: number): number {
  if (!logarithmic) return value;
  return value > 0 ? Math.log(value) : Number.NaN;
}
