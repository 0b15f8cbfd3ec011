/** Selections in the user's terms, in the wording that findings and flags have too. Escaped by the writers. */
import type { Dataset } from "../dataset/dataset.ts";
import { EVERYTHING, type Selection } from "../dataset/selection.ts";
import { antennaLabels, scopeWords as wordsOfSelection } from "../rules/scope.ts";
import { upperFirst } from "./words.ts";

/** Only the parts that narrow it; absent and null mean the same. */
export type Scope = { readonly [Part in keyof Selection]?: Selection[Part] | null };

/** How the names of one dataset are written. */
export interface ScopeWords {
  /** `Q07`, or `Q07 (7)` where the name alone would not tell */
  antenna(number: number): string;
  /** `Q07-Q11` */
  baseline(antenna1: number, antenna2: number): string;
  /** `antenna Q07, sub-band 1, channels 40 to 44, 2032-03-14 21:45:10 to 22:12:00 UTC`; "the whole dataset" for no part */
  scope(scope: Scope): string;
  /** A reason without the selection that it begins with: it stands beside already. */
  reason(reason: string, scope: Scope): string;
  /** A sentence of a stage that knows antennas by number alone, with their names: `antenna 7`, `baseline 3-9` ... */
  named(text: string): string;
}

/** Antennas or baselines by number, alone or in a list. */
const NUMBERED = /\b(antennas?|baselines?) (\d+(?:-\d+)?(?:(?:, | and )\d+(?:-\d+)?)*)(?![\w%]|\.\d)/gi;

export function scopeWords(dataset: Pick<Dataset, "array">): ScopeWords {
  const antenna = antennaLabels(dataset.array.antennas);
  const named = (text: string) =>
    text.replace(
      NUMBERED,
      (_, word: string, numbers: string) =>
        `${word} ${numbers.replace(/\d+/g, (number) => antenna(Number(number)))}`,
    );
  const scope = (what: Scope) => wordsOfSelection(selectionOf(what), antenna);
  return {
    antenna,
    baseline: (a, b) => `${antenna(a)}-${antenna(b)}`,
    scope,
    reason: (reason, what) => {
      const beginning = `${upperFirst(scope(what))}: `;
      return named(reason.startsWith(beginning) ? reason.slice(beginning.length) : reason);
    },
    named,
  };
}

function selectionOf(scope: Scope): Selection {
  const { antennas, baselines, time, subbands, channels, polarizations, fields } = {
    ...EVERYTHING,
    ...scope,
  };
  return { antennas, baselines, time, subbands, channels, polarizations, fields };
}
