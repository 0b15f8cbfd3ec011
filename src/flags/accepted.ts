/** Flags that a person has accepted: what `apply` needs of them, whatever file they come from. */
import type { Selection } from "../dataset/selection.ts";
import { InputError, nearest } from "../util/errors.ts";

export interface AcceptedFlag extends Selection {
  /** such as "F1"; the second piece of a flag that a file could only hold in pieces is "F1.2" */
  readonly id: string;
  readonly rule: string;
  /** hostile text */
  readonly reason: string;
}

export interface AcceptedFlags {
  /** name of the dataset that they were suggested for; null where the file does not say */
  readonly dataset: string | null;
  readonly flags: readonly AcceptedFlag[];
}

export interface Choice {
  /** in the order of the file */
  readonly chosen: readonly AcceptedFlag[];
  readonly skipped: readonly AcceptedFlag[];
}

/**
 * Flags by id: `only` these, or all `except` those. A flag in pieces (F1.1, F1.2) is meant by its id, too.
 *
 * @throws InputError for an id that no flag has
 */
export function chooseFlags(
  flags: readonly AcceptedFlag[],
  only: readonly string[] | null,
  except: readonly string[],
): Choice {
  for (const id of [...(only ?? []), ...except]) requireId(flags, id);
  const taken = ({ id }: AcceptedFlag) =>
    (only === null || only.some((wanted) => means(wanted, id))) && !except.some((left) => means(left, id));
  return { chosen: flags.filter(taken), skipped: flags.filter((flag) => !taken(flag)) };
}

function means(wanted: string, id: string): boolean {
  return id === wanted || (id.startsWith(`${wanted}.`) && /^\d+$/.test(id.slice(wanted.length + 1)));
}

function requireId(flags: readonly AcceptedFlag[], wanted: string): void {
  if (flags.some(({ id }) => means(wanted, id))) return;
  const ids = flags.map(({ id }) => id);
  const near = nearest(wanted, ids);
  const known = ids.length === 0 ? "it has no flags" : `it has ${listed(ids)}`;
  throw new InputError(
    `the file of flags has no flag ${wanted}: ${known}`,
    {},
    near === undefined ? "Name flags by their ids, separated by commas" : `Did you mean ${near}?`,
  );
}

function listed(ids: readonly string[]): string {
  return ids.length > 20 ? `${ids.slice(0, 20).join(", ")} and ${ids.length - 20} more` : ids.join(", ");
}
