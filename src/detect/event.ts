/**
 * An event: something that happened to some samples, attributed to the smallest cause that explains it.
 */
import type { Selection } from "../dataset/selection.ts";

export const EVENT_KINDS = [
  // amplitude
  "persistent-line",
  "burst",
  "drifting-line",
  "lone-samples",
  "silent-antenna",
  "weak-antenna",
  "stuck-zeros",
  "gain-step",
  "dropout",
  "noisy",
  // phase
  "phase-jump",
  "half-turn",
  "delay-slope",
  "phase-noise",
  "closure",
  // polarization, weights
  "exchanged-hands",
  "hand-off",
  "weight-mismatch",
] as const;
export type EventKind = (typeof EVENT_KINDS)[number];

/** The kinds that are interference. */
export const INTERFERENCE_KINDS: ReadonlySet<EventKind> = new Set<EventKind>([
  "persistent-line",
  "burst",
  "drifting-line",
  "lone-samples",
]);

export interface DetectedEvent {
  readonly kind: EventKind;
  /** the smallest cause that explains it */
  readonly cause: "antenna" | "baseline" | "channels" | "time" | "samples" | "correlator";
  /** the samples concerned */
  readonly scope: Selection;
  /** what flagging it would take: the smallest selection that removes its harm; null: flagging is no cure */
  readonly flag: Selection | null;
  /** what the cure takes besides `flag`, such as the other stretches of a dropout; only where `flag` is not null */
  readonly alsoFlag?: readonly Selection[];
  /** its size, in `unit`: degrees of a jump, sigmas of interference, ratio of a gain */
  readonly size: number;
  /** 1 sigma error of `size`; NaN where it has none */
  readonly sizeError: number;
  readonly unit: string;
  /** how sure that it is real, in sigmas of the test that found it */
  readonly significance: number;
  /** 0..1 that the flag removes a fault and not sky */
  readonly confidence: number;
  /** samples of `scope` not flagged before, and those of them found outlying */
  readonly samples: number;
  readonly outlying: number;
  /** one sentence: what was seen, with numbers and units; no hostile text */
  readonly evidence: string;
  /** a repair other than flagging ("calibrate after 02:14:30"), or null */
  readonly repair: string | null;
}
