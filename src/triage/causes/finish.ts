/** Causes with their words, the findings that agree, and the flags against them. */
import { countSelections } from "../../dataset/flagged-view.ts";
import type { Selection } from "../../dataset/selection.ts";
import type { FlagEntry } from "../../flags/entry.ts";
import { forecast } from "../../imaging/forecast.ts";
import type { Check } from "../../report/report.ts";
import type { ScopeWords } from "../../report/scope.ts";
import { sentence } from "../../report/words.ts";
import type { Investigation } from "../investigate.ts";
import type { TriageCause } from "./cause.ts";
import { causeOf, type FoundCause, foundCauses } from "./found.ts";
import { findingsFor } from "./join-findings.ts";
import { wordsOf } from "./words.ts";

export interface Finished {
  readonly causes: readonly TriageCause[];
  readonly minor: readonly TriageCause[];
  readonly flags: readonly FlagEntry[];
}

/** Two passes over the weights where samples are at fault. */
export async function finishedCauses(
  { seen, ranking }: Investigation,
  check: Check,
  words: ScopeWords,
): Promise<Finished> {
  const found = foundCauses(seen, ranking);
  const flagged = found.filter(({ scope }) => scope !== null);
  const flags = await flagsFor(flagged, check);
  const finish = (cause: FoundCause): TriageCause => {
    const said = wordsOf(cause, seen, check, words);
    const findings = findingsFor(cause.kind, cause.scope, check);
    const at = flagged.indexOf(cause);
    const severities = findings.map(({ severity }) => severity);
    return {
      kind: cause.kind,
      title: said.title,
      where: cause.scope === null ? "" : words.scope(cause.scope),
      scope: cause.scope,
      share: cause.share,
      severity: severities.length === 0 ? Number.NaN : Math.max(...severities),
      evidence: [
        ...said.evidence,
        ...findings.map(
          ({ title, evidence }) =>
            `The check found it in the data as well: ${title}. ${evidence.map((text) => sentence(words.named(text))).join(" ")}`,
        ),
      ].map((text) => text.trim()),
      rules: [...new Set(findings.map(({ rule }) => rule))],
      test: said.test,
      cure: said.cure,
      flags: at < 0 ? [] : [flags[at]!.id],
    };
  };
  return {
    causes: found.map(finish),
    minor: ranking.minor.map((fault) => finish(causeOf(seen, fault))),
    flags,
  };
}

/** One entry a cause, in their order. */
async function flagsFor(causes: readonly FoundCause[], check: Check): Promise<FlagEntry[]> {
  if (causes.length === 0) return [];
  const { dataset } = check;
  const selections = causes.map(({ scope }) => scope as Selection);
  const { each, total } = await countSelections(dataset, selections);
  const { costs } = await forecast(check.survey, check.plan);
  const cost = await costs(selections);
  const entries: FlagEntry[] = [];
  for (const [i, cause] of causes.entries()) {
    entries.push({
      id: `T${i + 1}`,
      rule: `triage-${cause.kind}`,
      reason: `Accounts for ${Math.round(100 * cause.share)} % of what is wrong with the image`,
      ...selections[i]!,
      samples: each[i]!.unflagged,
      fraction: total.unflagged > 0 ? each[i]!.unflagged / total.unflagged : 0,
      confidence: Math.min(0.99, 0.5 + 0.5 * cause.share),
      cost: cost[i]!,
    });
  }
  return entries;
}
