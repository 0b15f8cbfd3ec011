/** Findings in the data that speak for a cause seen in the image. */
import type { Selection } from "../../dataset/selection.ts";
import type { Check } from "../../report/report.ts";
import type { Finding } from "../../rules/finding.ts";
import type { CauseKind } from "./cause.ts";

/** Rules whose findings mean a kind of cause, by family where all of them do. */
const RULES: Readonly<Record<CauseKind, readonly string[]>> = {
  baseline: ["closure", "calibrator-baseline", "flagged-baseline", "lone-samples", "burst"],
  interference: ["persistent-line", "burst", "drifting-line", "lone-samples", "interference-share"],
  "antenna-gain": [
    "gain-step",
    "weak-antenna",
    "silent-antenna",
    "dropout",
    "hand-off",
    "stuck-zeros",
    "calibrator-antenna",
    "unequal-hands",
  ],
  "antenna-phase": [
    "phase-jump",
    "half-turn",
    "delay-slope",
    "phase-noise",
    "calibrator-antenna",
    "antenna-position",
    "antenna-position-by-phase",
  ],
  "bad-samples": ["noisy", "phase-noise", "dropout", "delay-slope", "weight-mismatch", "exchanged-hands"],
  "w-term": ["w-at-field-edge", "w-planes", "w-long-baselines", "w-zeroed"],
  "bandwidth-smearing": ["bandwidth-smearing"],
  "time-smearing": ["time-smearing"],
  "missing-short-spacings": ["missing-large-scales", "radial-gap"],
  "outside-source": [],
};

export function findingsFor(kind: CauseKind, scope: Selection | null, check: Check): Finding[] {
  const rules = RULES[kind];
  return check.findings.filter(
    (finding) => rules.includes(finding.rule) && (scope === null || overlaps(scope, finding.scope)),
  );
}

/** Whether two selections may share samples, as far as antennas, times and channels tell. */
function overlaps(one: Selection, other: Finding["scope"]): boolean {
  const antennas = antennasOf(one);
  const others = antennasOf(other);
  if (antennas !== null && others !== null && !antennas.some((antenna) => others.includes(antenna))) {
    return false;
  }
  if (one.time !== null && other.time !== undefined) {
    if (one.time[1] < other.time[0] || one.time[0] > other.time[1]) return false;
  }
  if (one.channels !== null && other.channels !== undefined) {
    const ranges = other.channels;
    return one.channels.some(([low, high]) => ranges.some(([from, to]) => low <= to && high >= from));
  }
  return true;
}

function antennasOf(scope: Partial<Pick<Selection, "antennas" | "baselines">>): readonly number[] | null {
  if (scope.antennas !== undefined && scope.antennas !== null) return scope.antennas;
  return scope.baselines?.flat() ?? null;
}
