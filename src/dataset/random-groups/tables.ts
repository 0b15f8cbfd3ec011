/** The tables around the groups, told by the last word of EXTNAME: AN, FQ, SU and FG; the others are skipped. */

import type { FitsFile, Hdu } from "../fits/hdus.ts";
import { lastWord } from "../fits-tables/last-word.ts";
import type { Notes } from "../notes.ts";

export interface TableHdus {
  /** one a sub-array: EXTVER is its number; ascending, each once */
  readonly antennas: readonly Hdu[];
  readonly frequencies: Hdu | undefined;
  readonly sources: Hdu | undefined;
  readonly flags: Hdu | undefined;
}

const KINDS = ["AN", "FQ", "SU", "FG"];

export function findTables(file: FitsFile, notes: Notes): TableHdus {
  const tables = file.hdus.slice(1).filter(({ kind }) => kind === "binary table");
  const ofKind = (kind: string) => tables.filter((hdu) => lastWord(hdu) === kind);
  noteSkipped(file, notes);
  return {
    antennas: distinctVersions("AN", ofKind("AN"), notes),
    frequencies: onlyOne("FQ", ofKind("FQ"), notes),
    sources: onlyOne("SU", ofKind("SU"), notes),
    // Later versions of the flag table hold the earlier ones' flags and more.
    flags: ofKind("FG").sort((a, b) => b.version - a.version)[0],
  };
}

function noteSkipped(file: FitsFile, notes: Notes): void {
  const skipped = file.hdus
    .slice(1)
    .filter((hdu) => hdu.kind !== "binary table" || !KINDS.includes(lastWord(hdu)))
    .map((hdu) => `${hdu.name === "" ? "unnamed" : hdu.name} (${hdu.kind})`);
  if (skipped.length === 0) return;
  const shown = skipped.slice(0, 12).join(", ");
  const more = skipped.length > 12 ? ` and ${skipped.length - 12} more` : "";
  notes.note("tables-skipped", `not needed and not read: ${shown}${more}`);
}

function distinctVersions(kind: string, hdus: readonly Hdu[], notes: Notes): Hdu[] {
  const byVersion = new Map<number, Hdu>();
  for (const hdu of hdus) {
    const earlier = byVersion.get(hdu.version);
    if (earlier === undefined) byVersion.set(hdu.version, hdu);
    else noteTwice(kind, earlier, hdu, notes);
  }
  return [...byVersion.values()].sort((a, b) => a.version - b.version);
}

function onlyOne(kind: string, hdus: readonly Hdu[], notes: Notes): Hdu | undefined {
  const [first, ...others] = hdus;
  for (const other of others) noteTwice(kind, first!, other, notes);
  return first;
}

function noteTwice(kind: string, first: Hdu, other: Hdu, notes: Notes): void {
  const text =
    `two ${kind} tables have EXTVER ${first.version} and ${other.version} (HDU ${first.index} and HDU ${other.index}): ` +
    `HDU ${first.index} is used`;
  notes.fault("duplicate-table", text);
}
