/** How long a history keeps its checks, and what goes when it is pruned. */

import { mjdFromDate } from "../util/dates.ts";
import { InputError } from "../util/errors.ts";
import { parseDuration } from "../util/units.ts";
import type { CheckRow } from "./history/records.ts";

/** Keep the newest checks, so many of them or so many days of nights back from the newest. */
export type Keep = { readonly checks: number } | { readonly days: number };

/** @throws InputError where it is neither a count nor a time */
export function parseKeep(text: string): Keep {
  const count = /^\s*(\d{1,9})(?:\s*checks?)?\s*$/.exec(text);
  if (count !== null && Number(count[1]) > 0) return { checks: Number(count[1]) };
  const nights = /^\s*(\d{1,6})\s*nights?\s*$/.exec(text);
  if (nights !== null && Number(nights[1]) > 0) return { days: Number(nights[1]) };
  try {
    const days = parseDuration(text) / 86_400;
    if (days >= 1) return { days };
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
  }
  throw new InputError(
    `--keep ${text}: expected how many checks or how long`,
    {},
    "Write a count such as 2000checks, or a time of a day or more such as 365d",
  );
}

/** The checks that are beyond it, oldest first. @param checks in order of their nights */
export function beyond(checks: readonly CheckRow[], keep: Keep): CheckRow[] {
  if ("checks" in keep) return checks.slice(0, Math.max(0, checks.length - keep.checks));
  const newest = checks.at(-1);
  if (newest === undefined) return [];
  const edge = mjdFromDate(newest.night) - keep.days;
  return checks.filter(({ night }) => mjdFromDate(night) <= edge);
}
