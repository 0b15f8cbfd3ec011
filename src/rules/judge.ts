/** The judgement of a set of measures by a set of rules. */
import type { Selection } from "../dataset/selection.ts";
import type { Plan } from "../imaging/plan.ts";
import type { Measures, RowKind } from "../measure/table.ts";
import { type Applied, applyRule } from "./apply-rule.ts";
import { withEventLimits } from "./event-limits.ts";
import { FAMILIES, type Finding } from "./finding.ts";
import { findingOf } from "./finding-text.ts";
import type { FilledHit, Hit, Judged } from "./hit.ts";
import type { Rule, RuleSet } from "./rule.ts";
import { datasetVerdict, scoreOf } from "./severity.ts";

export type { Hit, Judged } from "./hit.ts";

/** A rule with more rows past its caution limit than this says them in one finding. */
export const MOST_FINDINGS_OF_A_RULE = 6;

/**
 * Judge measures. The score and verdict are of these measures alone: flags that are not applied do not soften them.
 * A rule whose measure, columns or numbers are missing is named in `notJudged`.
 */
export function judge(rules: RuleSet, given: Measures, plan: Plan): Judged {
  const measures = withEventLimits(given);
  const hits: Hit[] = [];
  const findings: Finding[] = [];
  const taken: { rule: string; points: number }[] = [];
  const notJudged: { rule: string; why: string }[] = [];
  const unjudged: { rule: string; scope: Selection }[] = [];
  const worst: { weight: number; severity: number }[] = [];
  for (const rule of rules.rules) {
    const applied = applyRule(rule, measures, plan);
    if (applied.notJudged !== null) notJudged.push({ rule: rule.id, why: applied.notJudged });
    for (const scope of applied.unjudged) unjudged.push({ rule: rule.id, scope });
    if (applied.hits.length === 0) continue;
    let severity = 0;
    for (const hit of applied.hits) {
      hits.push(hit);
      severity = Math.max(severity, hit.severity);
    }
    worst.push({ weight: rule.weight, severity });
    if (rule.weight > 0) taken.push({ rule: rule.id, points: 100 * rule.weight * severity });
    findings.push(...findingsOf(rule, applied, plan, measures));
  }
  const score = scoreOf(worst);
  return {
    score,
    verdict: datasetVerdict(
      findings.map((finding) => finding.verdict),
      score,
    ),
    findings: worstFirst(findings, rules),
    taken: taken.sort((a, b) => b.points - a.points || (a.rule < b.rule ? -1 : 1)),
    notJudged,
    measures,
    hits,
    unjudged,
  };
}

function findingsOf(rule: Rule, applied: Applied, plan: Plan, measures: Measures): Finding[] {
  const groups = groupsOf(rule, applied);
  if (groups.length <= MOST_FINDINGS_OF_A_RULE) {
    return groups.map((group) => findingOf(rule, group, applied.judged, plan, measures));
  }
  return [findingOf(rule, groups.flat(), applied.judged, plan, measures)];
}

/** Scope parts that a row kind is told apart by; a kind without any has one finding a row. */
const KEYS: Partial<Record<RowKind, readonly (keyof Hit["scope"])[]>> = {
  dataset: [],
  antenna: ["antennas"],
  baseline: ["baselines"],
  channel: ["subbands", "channels"],
  subband: ["subbands"],
  polarization: ["polarizations"],
  field: ["fields"],
  scan: ["fields", "time"],
  time: ["time"],
};

/** Rows that one finding speaks of: those of one antenna, one baseline and so on, as the rule's `each` says. */
function groupsOf(rule: Rule, applied: Applied): FilledHit[][] {
  const all = applied.hits.map((hit, i) => ({ hit, values: applied.fillings[i]! }));
  const keys = KEYS[rule.each];
  if (keys === undefined) return all.map((one) => [one]);
  const groups = new Map<string, FilledHit[]>();
  for (const one of all) {
    const key = JSON.stringify(keys.map((part) => one.hit.scope[part]));
    const group = groups.get(key);
    if (group === undefined) groups.set(key, [one]);
    else group.push(one);
  }
  return [...groups.values()];
}

const VERDICTS = { hold: 0, caution: 1, ready: 2 } as const;

/** How far past its hold limit, in the rule's unit. */
function beyond({ limits, measured }: Finding): number {
  return limits.hold > limits.caution ? measured.value - limits.hold : limits.hold - measured.value;
}

/** Infinities are equal to themselves, which their difference is not. */
function descending(a: number, b: number): number {
  return a > b ? -1 : a < b ? 1 : 0;
}

/** Holds before cautions, then what costs the score most, then by family and rule; equals stay in row order. */
export function worstFirst(findings: readonly Finding[], rules: RuleSet): Finding[] {
  const weights = new Map(rules.rules.map((rule) => [rule.id, rule.weight]));
  const points = (finding: Finding) => (weights.get(finding.rule) ?? 0) * finding.severity;
  return [...findings].sort(
    (a, b) =>
      VERDICTS[a.verdict] - VERDICTS[b.verdict] ||
      points(b) - points(a) ||
      FAMILIES.indexOf(a.family) - FAMILIES.indexOf(b.family) ||
      (a.rule < b.rule ? -1 : a.rule > b.rule ? 1 : descending(beyond(a), beyond(b))),
  );
}
