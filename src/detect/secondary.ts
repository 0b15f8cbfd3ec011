/** Events that another event explains: its shadow in another measure of the same samples. */
import type { Selection } from "../dataset/selection.ts";
import { type DetectedEvent, type EventKind, INTERFERENCE_KINDS } from "./event.ts";

/** What each kind may cast on others. */
const SHADOWS: Partial<Record<EventKind, readonly EventKind[]>> = {
  "stuck-zeros": [
    "silent-antenna",
    "dropout",
    "hand-off",
    "weak-antenna",
    "gain-step",
    "noisy",
    "weight-mismatch",
  ],
  "exchanged-hands": [
    "silent-antenna",
    "dropout",
    "hand-off",
    "weak-antenna",
    "gain-step",
    "phase-jump",
    "closure",
  ],
  "silent-antenna": [
    "weak-antenna",
    "gain-step",
    "phase-jump",
    "half-turn",
    "phase-noise",
    "delay-slope",
    "hand-off",
  ],
  "hand-off": ["weak-antenna", "gain-step", "phase-jump", "half-turn", "phase-noise", "delay-slope"],
  dropout: [
    "weak-antenna",
    "gain-step",
    "phase-jump",
    "half-turn",
    "phase-noise",
    "delay-slope",
    "weight-mismatch",
  ],
  noisy: ["weight-mismatch"],
  "gain-step": ["noisy", "weight-mismatch", "weak-antenna", "closure"],
  "phase-jump": ["closure"],
  "half-turn": ["closure"],
  "phase-noise": ["gain-step", "closure", "phase-jump"],
  "delay-slope": ["gain-step", "phase-jump", "weak-antenna", "closure"],
  closure: ["weight-mismatch"],
};

/** What interference left in the channel averages, at the times of its own. */
const OF_INTERFERENCE: ReadonlySet<EventKind> = new Set<EventKind>([
  "gain-step",
  "phase-jump",
  "delay-slope",
  "closure",
]);

/** Integrations by which the edges of a shadow may miss those of its cause, days a step. */
const SLACK = 1.5;

/** @param integration seconds */
export function withoutShadows(events: readonly DetectedEvent[], integration: number): DetectedEvent[] {
  const slack = (SLACK * (Number.isFinite(integration) ? integration : 0)) / 86_400;
  return events.filter(
    (event) =>
      !events.some(
        (other) =>
          other !== event &&
          ((INTERFERENCE_KINDS.has(other.kind) &&
            OF_INTERFERENCE.has(event.kind) &&
            (within(other.scope.time, event.scope.time, slack) || startsIn(other, event, slack))) ||
            ((SHADOWS[other.kind] ?? []).includes(event.kind) &&
              concerns(other.scope, event.scope) &&
              meets(other.scope.time, event.scope.time, slack))),
      ),
  );
}

/** Everything that `shadow` is about hangs on what `cause` is about. */
function concerns(cause: Selection, shadow: Selection): boolean {
  const within = (antenna: number) =>
    (cause.antennas ?? []).includes(antenna) ||
    (cause.baselines ?? []).some((pair) => pair.includes(antenna) && shadow.antennas !== null);
  if (cause.antennas === null && cause.baselines === null) return true;
  if (shadow.antennas !== null) return cause.antennas !== null && shadow.antennas.every(within);
  if (shadow.baselines === null) return false;
  return shadow.baselines.every(([a, b]) =>
    cause.antennas !== null
      ? within(a) || within(b)
      : (cause.baselines ?? []).some(([x, y]) => (x === a && y === b) || (x === b && y === a)),
  );
}

/** The shadow lies in the interference's time, which is not all there is. */
function within(cause: Selection["time"], shadow: Selection["time"], slack: number): boolean {
  if (cause === null || shadow === null) return false;
  return cause[0] - 2 * slack <= shadow[0] && shadow[1] <= cause[1] + 2 * slack;
}

/** Interference of this many times its significance can leave a step behind that seems to last. */
const FAR_ABOVE = 4;

function startsIn(cause: DetectedEvent, shadow: DetectedEvent, slack: number): boolean {
  if (cause.scope.time === null || shadow.scope.time === null) return false;
  const [start, end] = cause.scope.time;
  const from = shadow.scope.time[0];
  return (
    start - slack <= from && from <= end + 2 * slack && cause.significance > FAR_ABOVE * shadow.significance
  );
}

/** Overlap in time, an edge within the slack counting. */
function meets(cause: Selection["time"], shadow: Selection["time"], slack: number): boolean {
  if (cause === null || shadow === null) return true;
  return cause[0] - slack <= shadow[1] && shadow[0] <= cause[1] + slack;
}
