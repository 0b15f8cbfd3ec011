/**
 * What caps the dynamic range, worst first: the events, each as if it were alone.
 */
import type { DetectedEvent, EventKind } from "../detect/event.ts";
import { formatNumber } from "../util/units.ts";
import type { GriddedImage } from "./cost.ts";
import { capsOf } from "./error-caps.ts";
import { type EventError, errorOf, spoils } from "./event-errors.ts";
import type { Limit } from "./image.ts";

/** A limit and the event behind it; null for one of the whole dataset. */
export interface RankedLimit extends Limit {
  readonly event: DetectedEvent | null;
  /** of that event in the list given */
  readonly eventIndex: number | null;
}

/** More events than these are not ranked one by one: the most significant are. */
const MOST_EVENTS = 48;

/** One snapshot, peak over rms, error e; for tests and for words. `of`: what carries the error. */
export function snapshotDynamicRange(
  of: "baseline" | "antenna" | "baselines" | "antennas",
  n: number,
  e: number,
): number {
  switch (of) {
    case "baseline":
      return (n * (n - 1)) / (Math.SQRT2 * e);
    case "antenna":
      return (n * Math.sqrt(n - 1)) / (Math.SQRT2 * e);
    case "baselines":
      return Math.sqrt(n * (n - 1)) / e;
    case "antennas":
      return Math.sqrt(n * (n - 1)) / (Math.SQRT2 * e);
  }
}

/** What the amplitudes are measured against, dataset unit. */
export interface SourceLevel {
  /** amplitude of the source; 0 or NaN unknown */
  readonly brightness: number;
  /** typical noise of one sample */
  readonly sampleNoise: number;
}

/** Limits by events, each as if it were alone; events that leave a point source as it is have none. */
export async function eventLimits(
  image: GriddedImage,
  events: readonly DetectedEvent[],
  level: SourceLevel,
): Promise<RankedLimit[]> {
  const ranked = events
    .map((event, eventIndex) => ({ event, eventIndex, error: errorOf(event, level) }))
    .filter(({ error }) => spoils(error))
    .sort((a, b) => b.event.significance - a.event.significance || a.eventIndex - b.eventIndex)
    .slice(0, MOST_EVENTS);
  const caps = await capsOf(
    image,
    ranked.map(({ event, error }) => ({ scope: event.scope, error, samples: event.samples })),
  );
  return ranked.flatMap(({ event, eventIndex, error }, i) =>
    Number.isFinite(caps[i]!) ? [{ ...limitOf(event, error, caps[i]!), eventIndex }] : [],
  );
}

const CAUSES: Partial<Record<EventKind, string>> = {
  "half-turn": "half-turn flip",
  closure: "correlator error",
};

function limitOf(event: DetectedEvent, error: EventError, range: number): Omit<RankedLimit, "eventIndex"> {
  const cause = CAUSES[event.kind] ?? event.kind.replaceAll("-", " ");
  return {
    event,
    cause: event.kind,
    dynamicRangeFraction: range,
    text: `${cause} on ${scopeText(event)}: ${error.what} allows a dynamic range of ${formatNumber(range)}`,
  };
}

/** "antenna 7", "baseline 3-9", "2 antennas" ... numbers only, so that nothing hostile gets into it. */
function scopeText(event: DetectedEvent): string {
  const { antennas, baselines, channels } = event.scope;
  if (antennas !== null && antennas.length > 0) return named("antenna", antennas.map(String));
  if (baselines !== null && baselines.length > 0) {
    return named(
      "baseline",
      baselines.map(([a, b]) => `${a}-${b}`),
    );
  }
  if (channels !== null && channels.length > 0) {
    return named(
      "channel",
      channels.map(([low, high]) => (low === high ? `${low}` : `${low}-${high}`)),
    );
  }
  return "all antennas";
}

function named(word: string, names: readonly string[]): string {
  if (names.length > 4) return `${names.length} ${word}s`;
  return `${word}${names.length === 1 ? "" : "s"} ${names.join(", ")}`;
}
