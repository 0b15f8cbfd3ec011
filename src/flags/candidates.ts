/** What might be flagged: the cure of each event, and the scope of each row that a rule with `suggests: flag` finds. */
import { EVERYTHING, type Selection } from "../dataset/selection.ts";
import type { DetectedEvent } from "../detect/event.ts";
import type { Measures } from "../measure/table.ts";
import type { Hit, Judged } from "../rules/hit.ts";
import type { RuleSet } from "../rules/rule.ts";
import type { Candidate } from "./candidate.ts";
import { contains } from "./selection-algebra.ts";

/** The measure whose row i is event i. */
const EVENT_MEASURE = "event";
/** Rows of these kinds are no samples that could be dropped. */
const NO_SAMPLES: ReadonlySet<string> = new Set(["dataset", "event", "gap", "weighting"]);
/** What a rule finds on a measure is surer the further it goes: common practice, no source. */
const LEAST_SURE = 0.6;
const MOST_SURE = 0.9;

/**
 * @param events in the order of the measure "event"
 * @param rules those in force: what no rule looks at is not suggested
 */
export function flagCandidates(
  events: readonly DetectedEvent[],
  judged: Judged,
  rules: RuleSet,
): Candidate[] {
  return [...fromEvents(events, judged, rules), ...fromHits(judged.hits)];
}

function fromEvents(events: readonly DetectedEvent[], judged: Judged, rules: RuleSet): Candidate[] {
  const worst = new Map<number, Hit>();
  for (const hit of judged.hits) {
    if (hit.measure.name !== EVENT_MEASURE) continue;
    const known = worst.get(hit.row);
    if (known === undefined || hit.severity > known.severity) worst.set(hit.row, hit);
  }
  const excessOf = excessReader(judged.measures);
  const inForce = new Set(rules.rules.map((rule) => rule.id));
  return events.flatMap((event, i) => {
    const hit = worst.get(i);
    // An event within its limits belongs to the rule of its kind, which has the kind's name.
    const rule = hit?.rule.id ?? (inForce.has(event.kind) ? event.kind : undefined);
    if (event.flag === null || rule === undefined) return [];
    return [event.flag, ...(event.alsoFlag ?? [])].map((selection) => ({
      selection,
      rule,
      confidence: Math.min(1, Math.max(0, event.confidence)),
      severity: hit?.severity ?? 0,
      excess: excessOf(i),
      reasons: [event.evidence],
      repair: event.repair,
    }));
  });
}

/** By row of the measure of events, the rms that it adds to the image over the thermal noise; null: not known. */
function excessReader(measures: Measures): (row: number) => number | null {
  const events = measures.get(EVENT_MEASURE);
  if (events === undefined || !events.table.columnNames().includes("excess")) return () => null;
  return (row) => {
    const excess = Number(events.table.get("excess", row));
    return Number.isFinite(excess) ? excess : null;
  };
}

function fromHits(hits: readonly Hit[]): Candidate[] {
  return hits.flatMap((hit) => {
    if (hit.rule.suggests !== "flag" || NO_SAMPLES.has(hit.measure.each) || isEverything(hit.scope))
      return [];
    return [
      {
        selection: hit.scope,
        rule: hit.rule.id,
        confidence: LEAST_SURE + (MOST_SURE - LEAST_SURE) * hit.severity,
        severity: hit.severity,
        excess: null,
        reasons: [hit.rule.title],
        repair: null,
      },
    ];
  });
}

function isEverything(selection: Selection): boolean {
  return contains(selection, EVERYTHING);
}
