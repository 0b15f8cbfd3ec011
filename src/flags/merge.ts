/**
 * Few and large: candidates of one rule that are alike but for one part become one where that takes the very same
 * samples, and those inside another of the rule go. Different antennas stay apart: a person accepts or refuses each.
 */
import { unionScope } from "../rules/scope.ts";
import type { Candidate } from "./candidate.ts";
import { canonical, contains, keyWithout } from "./selection-algebra.ts";

const JOINED_PARTS = ["polarizations", "channels", "subbands", "baselines", "fields", "time"] as const;
const MOST_ROUNDS = 8;
const MOST_REASONS = 3;

/**
 * @param times integration centres, MJD ascending: two time ranges with none of them between are one
 * @returns what covers exactly the samples of the given ones
 */
export function mergeCandidates(candidates: readonly Candidate[], times: Float64Array): Candidate[] {
  let merged = candidates.map((one) => ({ ...one, selection: canonical(one.selection) })).sort(byKey);
  for (let round = 0; round < MOST_ROUNDS; round++) {
    const before = merged.length;
    merged = withoutInnerOfRule(merged);
    for (const part of JOINED_PARTS) merged = joinAlong(part, merged, times);
    if (merged.length === before) break;
  }
  return withoutInnerOfRule(merged).sort(byKey);
}

function byKey(a: Candidate, b: Candidate): number {
  const [keyA, keyB] = [sortKey(a), sortKey(b)];
  return keyA < keyB ? -1 : keyA > keyB ? 1 : 0;
}

/** Everything that tells candidates apart, so that their order never depends on how they were found. */
function sortKey(one: Candidate): string {
  return `${one.rule} ${keyWithout(one.selection, null)} ${one.severity} ${one.confidence} ${one.reasons.join(" ")}`;
}

function joinAlong(
  part: (typeof JOINED_PARTS)[number],
  candidates: Candidate[],
  times: Float64Array,
): Candidate[] {
  const groups = new Map<string, Candidate[]>();
  for (const one of candidates) {
    const key = `${one.rule} ${keyWithout(one.selection, part)}`;
    const group = groups.get(key);
    if (group === undefined) groups.set(key, [one]);
    else group.push(one);
  }
  return [...groups.values()].flatMap((group) => {
    if (group.length === 1) return group;
    if (part === "time") return joinTimes(group, times);
    return [joined(group)];
  });
}

/** Of candidates alike but for their times, those that follow each other without an integration between. */
function joinTimes(group: readonly Candidate[], times: Float64Array): Candidate[] {
  const ordered = [...group].sort((a, b) => timeOf(a)[0] - timeOf(b)[0] || timeOf(a)[1] - timeOf(b)[1]);
  const runs: Candidate[][] = [];
  let end = Number.NEGATIVE_INFINITY;
  for (const one of ordered) {
    const [first, last] = timeOf(one);
    const run = runs.at(-1);
    if (run === undefined || (first > end && anyBetween(times, end, first))) {
      runs.push([one]);
      end = last;
    } else {
      run.push(one);
      end = Math.max(end, last);
    }
  }
  return runs.map((run) => (run.length === 1 ? run[0]! : joined(run)));
}

/** Candidates that name no time are not here: they hold the others, which are gone. */
function timeOf({ selection }: Candidate): readonly [number, number] {
  return selection.time ?? [0, 0];
}

/** An integration centre lies strictly between the two. */
function anyBetween(times: Float64Array, after: number, before: number): boolean {
  let low = 0;
  let high = times.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if (times[middle]! <= after) low = middle + 1;
    else high = middle;
  }
  return low < times.length && times[low]! < before;
}

function joined(group: readonly Candidate[]): Candidate {
  const weightiest = [...group].sort((a, b) => b.severity - a.severity || b.confidence - a.confidence);
  return {
    selection: unionScope(group.map((one) => one.selection)),
    rule: group[0]!.rule,
    // As sure as the least sure of its parts: it takes their samples too.
    confidence: Math.min(...group.map((one) => one.confidence)),
    severity: weightiest[0]!.severity,
    excess: excessOf(group),
    reasons: distinct(weightiest.flatMap((one) => one.reasons)),
    repair: weightiest.find((one) => one.repair !== null)?.repair ?? null,
  };
}

/** Of several faults: they add as independent errors do. */
function excessOf(faults: readonly Candidate[]): number | null {
  const known = faults.flatMap(({ excess }) => (excess === null ? [] : [excess]));
  return known.length === 0 ? null : Math.hypot(...known);
}

function distinct(reasons: readonly string[]): string[] {
  return [...new Set(reasons)].slice(0, MOST_REASONS);
}

/** What lies inside another, larger one goes; the larger one mends its harm too. */
export function withoutInner<T extends Candidate>(candidates: readonly T[]): T[] {
  const isInner = (one: T, i: number) =>
    candidates.some(
      (other, j) =>
        j !== i &&
        contains(other.selection, one.selection) &&
        (j < i || !contains(one.selection, other.selection)),
    );
  return candidates
    .filter((one, i) => !isInner(one, i))
    .map((one) => {
      const inside = candidates.filter((other) => contains(one.selection, other.selection));
      const severity = Math.max(...inside.map((other) => other.severity));
      return { ...one, severity, excess: excessOf(inside) };
    });
}

/** `withoutInner` among the candidates of each rule alone. */
function withoutInnerOfRule(candidates: readonly Candidate[]): Candidate[] {
  const rules = [...new Set(candidates.map((one) => one.rule))];
  return rules.flatMap((rule) => withoutInner(candidates.filter((one) => one.rule === rule)));
}
