/** Suggested flags: few, large, each worth its cost, each with its reason. */
import type { Dataset } from "../dataset/dataset.ts";
import { countSelections, type SelectionCount, type SelectionCounts } from "../dataset/flagged-view.ts";
import type { Selection } from "../dataset/selection.ts";
import type { DetectedEvent } from "../detect/event.ts";
import type { Judged } from "../rules/hit.ts";
import type { RuleSet } from "../rules/rule.ts";
import { type AntennaLabel, antennaLabels, scopeWords } from "../rules/scope.ts";
import type { Workers } from "../util/workers.ts";
import type { Candidate } from "./candidate.ts";
import { flagCandidates } from "./candidates.ts";
import type { FlagCost, FlagEntry } from "./entry.ts";
import { mergeCandidates, withoutInner } from "./merge.ts";
import { keyWithout } from "./selection-algebra.ts";
import { whyNotWorth } from "./worth.ts";

export interface FlagRequest {
  readonly dataset: Dataset;
  /** integration centres, MJD ascending (Survey.times) */
  readonly times: Float64Array;
  /** in the order of the measure "event" */
  readonly events: readonly DetectedEvent[];
  /** of the data as they are */
  readonly judged: Judged;
  readonly rules: RuleSet;
  /** threads that share the passes over the weights; none: this one reads them */
  readonly workers?: Workers | undefined;
}

/** Samples that look at fault but that a person should judge. */
export interface Doubt {
  readonly selection: Selection;
  readonly rule: string;
  readonly reason: string;
  /** a clause */
  readonly why: string;
}

export interface FlagSuggestion {
  /** what flagging costs the beam and the coverage is not computed here: NaN, for `withCosts` to fill */
  readonly flags: readonly FlagEntry[];
  readonly doubts: readonly Doubt[];
}

/** A candidate and what it holds. */
interface Counted extends Candidate {
  readonly count: SelectionCount;
}

/** Two passes over the weights; none where nothing is at fault. */
export async function suggestFlags(request: FlagRequest): Promise<FlagSuggestion> {
  const { dataset, times, events, judged, rules, workers } = request;
  const merged = mergeCandidates(flagCandidates(events, judged, rules), times);
  if (merged.length === 0) return { flags: [], doubts: [] };
  const { each, total } = await countOf(dataset, merged, workers);
  const label = antennaLabels(dataset.array.antennas);
  const doubts: Doubt[] = [];
  const worthy: Counted[] = [];
  for (const [i, one] of merged.entries()) {
    const count = each[i]!;
    // Nothing left to drop: it is flagged already.
    if (count.unflagged === 0) continue;
    const why = whyNotWorth({ ...one, sensitivityLoss: lossOf(count, total) });
    if (why === null) worthy.push({ ...one, count });
    else doubts.push({ selection: one.selection, rule: one.rule, reason: reasonOf(one, label), why });
  }
  const ranked = withoutInner(worthy).sort(byRank);
  const { each: ofRanked } = await countOf(dataset, ranked, workers);
  // Without those whose samples the ones before them take all together.
  const uncovered = ranked.filter((_, i) => ofRanked[i]!.fresh > 0);
  const flags = uncovered.map((one, i) => entryOf(one, total, `F${i + 1}`, label));
  return { flags, doubts };
}

function countOf(
  dataset: Dataset,
  candidates: readonly Candidate[],
  workers: Workers | undefined,
): Promise<SelectionCounts> {
  return countSelections(
    dataset,
    candidates.map((one) => one.selection),
    workers,
  );
}

/** By confidence times samples, largest first. */
function byRank(a: Counted, b: Counted): number {
  const ranks = b.confidence * b.count.unflagged - a.confidence * a.count.unflagged;
  return ranks !== 0 ? ranks : tieKey(a) < tieKey(b) ? -1 : 1;
}

function tieKey(one: Candidate): string {
  return `${one.rule} ${keyWithout(one.selection, null)}`;
}

function entryOf(one: Counted, total: SelectionCount, id: string, label: AntennaLabel): FlagEntry {
  return {
    id,
    rule: one.rule,
    reason: reasonOf(one, label),
    ...one.selection,
    samples: one.count.unflagged,
    fraction: one.count.unflagged / total.unflagged,
    confidence: one.confidence,
    cost: {
      sensitivityLossFraction: lossOf(one.count, total),
      beamMajorChangeFraction: Number.NaN,
      beamMinorChangeFraction: Number.NaN,
      peakSidelobeChangeFraction: Number.NaN,
      largestGapChangeFraction: Number.NaN,
    },
  };
}

/** What selections cost together: 1 - sqrt(sum of kept weights / sum of all), natural weighting. */
export async function lossTogether(
  dataset: Dataset,
  selections: readonly Selection[],
  workers?: Workers,
): Promise<number> {
  const { union, total } = await countSelections(dataset, selections, workers);
  return lossOf(union, total);
}

/** 1 - sqrt(kept/all): the natural weight that goes. 0 when nothing has a weight. */
function lossOf(count: SelectionCount, total: SelectionCount): number {
  if (!(total.weight > 0)) return 0;
  return 1 - Math.sqrt(Math.max(0, total.weight - count.weight) / total.weight);
}

/** The entries with what each costs beam and coverage, in the same order. */
export function withCosts(
  flags: readonly FlagEntry[],
  costs: readonly Omit<FlagCost, "sensitivityLossFraction">[],
): FlagEntry[] {
  return flags.map((flag, i) => ({ ...flag, cost: { ...flag.cost, ...costs[i] } }));
}

/** `Antenna N07, sub-band 1, channels 40 to 44: what was seen. Instead of flagging, calibrate ...` */
function reasonOf(one: Candidate, label: AntennaLabel): string {
  const scope = scopeWords(one.selection, label);
  const seen = one.reasons.map(withoutStop).join("; ");
  const repair = one.repair === null ? "" : ` Or, instead of flagging: ${withoutStop(one.repair)}.`;
  return `${scope.charAt(0).toUpperCase()}${scope.slice(1)}: ${seen}.${repair}`;
}

function withoutStop(sentence: string): string {
  return sentence.trim().replace(/\.+$/, "");
}
