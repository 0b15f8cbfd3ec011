/** Findings of the data as they are, softened where the suggested flags mend them: by the second judgement, not by word. */
import { EVERYTHING, type Selection } from "../dataset/selection.ts";
import { INTERFERENCE_KINDS } from "../detect/event.ts";
import type { Finding, Verdict } from "../rules/finding.ts";
import type { Judged } from "../rules/hit.ts";
import { datasetVerdict, verdictOf } from "../rules/severity.ts";
import type { FlagEntry } from "./entry.ts";
import { contains, sameConcern } from "./selection-algebra.ts";

export interface Reconciled {
  /** those of `before`, with their flags; worst first */
  readonly findings: readonly Finding[];
  readonly verdict: Verdict;
}

/** The rule on the measure of all interference together. */
const INTERFERENCE_RULE = "interference-share";
const INTERFERENCE: ReadonlySet<string> = INTERFERENCE_KINDS;
const ORDER: Readonly<Record<Verdict, number>> = { hold: 0, caution: 1, ready: 2 };

/**
 * @param before of the data as they are
 * @param after of the data with the flags applied; the same as `before` when there are none
 */
export function reconcile(before: Judged, after: Judged, flags: readonly FlagEntry[]): Reconciled {
  const findings = before.findings
    .map((finding) => reconciled(finding, after, flags))
    // A stable sort: what has the same verdict stays in its order.
    .sort((a, b) => ORDER[a.verdict] - ORDER[b.verdict]);
  return {
    findings,
    verdict: datasetVerdict(
      findings.map((finding) => finding.verdict),
      after.score,
    ),
  };
}

function reconciled(finding: Finding, after: Judged, flags: readonly FlagEntry[]): Finding {
  if (flags.length === 0) return finding;
  const scope: Selection = { ...EVERYTHING, ...finding.scope };
  const left = severityLeft(finding, scope, after, flags);
  const better = verdictOf(left) !== finding.verdict && left < finding.severity;
  return {
    ...finding,
    // What the flags leave is worth a caution even when it is nothing: the flags have to be accepted first.
    verdict: better && finding.verdict === "hold" ? "caution" : finding.verdict,
    mendedByFlags: better,
    flags: linkedFlags(finding, scope, flags, better),
  };
}

/** The flags that a finding's own rule suggests for its samples; where it suggests none, those that mend it. */
function linkedFlags(
  finding: Finding,
  scope: Selection,
  flags: readonly FlagEntry[],
  mended: boolean,
): string[] {
  const near = flags.filter((flag) => sameConcern(flag, scope));
  const own = near.filter(({ rule }) => rule === finding.rule);
  if (own.length > 0) return own.map(({ id }) => id);
  if (!mended) return [];
  // Interference as a whole is mended by the flags of its kinds, whatever else is flagged.
  const kinds = near.filter(({ rule }) => INTERFERENCE.has(rule));
  const some = finding.rule === INTERFERENCE_RULE && kinds.length > 0 ? kinds : near;
  return some.map(({ id }) => id);
}

/** What the same rule says of the same samples with the flags applied, 0..1. */
function severityLeft(
  finding: Finding,
  scope: Selection,
  after: Judged,
  flags: readonly FlagEntry[],
): number {
  const hits = after.hits.filter((hit) => hit.rule.id === finding.rule && sameConcern(hit.scope, scope));
  const unseen = after.unjudged.some(
    (row) =>
      row.rule === finding.rule &&
      sameConcern(row.scope, scope) &&
      // Samples that the flags take away have no value any more: that is the cure, not a blind spot.
      !flags.some((flag) => contains(flag, row.scope)),
  );
  const worst = hits.reduce((most, hit) => Math.max(most, hit.severity), 0);
  return unseen ? Math.max(worst, finding.severity) : worst;
}
