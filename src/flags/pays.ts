/** Flags that leave the dataset worse off than the faults they drop, seen only when all of it is judged again. */
import type { Selection } from "../dataset/selection.ts";
import type { Judgement } from "../rules/finding.ts";
import type { FlagEntry } from "./entry.ts";
import type { Doubt } from "./suggest.ts";

/** Points that a cure may cost: less does not show in a score of whole numbers. */
const SMALL_FALL = 1;

export interface Paying {
  /** numbered anew */
  readonly flags: readonly FlagEntry[];
  readonly doubts: readonly Doubt[];
}

/**
 * Where the score falls with the flags applied, those go whose rule took fewer points than the fall.
 *
 * @param after of the data with all the flags applied
 */
export function payingFlags(flags: readonly FlagEntry[], before: Judgement, after: Judgement): Paying {
  const fall = before.score - after.score;
  const points = new Map(before.taken.map((one) => [one.rule, one.points]));
  const pays = (flag: FlagEntry) => fall < SMALL_FALL || (points.get(flag.rule) ?? 0) >= fall;
  return {
    flags: flags.filter(pays).map((flag, i) => ({ ...flag, id: `F${i + 1}` })),
    doubts: flags
      .filter((flag) => !pays(flag))
      .map((flag) => ({
        selection: selectionOf(flag),
        rule: flag.rule,
        reason: flag.reason,
        why: "dropping it would cost the image more than the fault does",
      })),
  };
}

function selectionOf(flag: FlagEntry): Selection {
  const { antennas, baselines, time, subbands, channels, polarizations, fields } = flag;
  return { antennas, baselines, time, subbands, channels, polarizations, fields };
}
