/** The tables around the groups, told by the last word of EXTNAME: AN, FQ, SU and FG; the others are skipped. */

import type { FitsFile, Hdu } from "../fits/hdus.ts";
import { distinctVersions, noteSkipped, onlyOne } from "../fits-tables/find-tables.ts";
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
  noteSkipped(file, (hdu) => KINDS.includes(lastWord(hdu)), notes);
  return {
    antennas: distinctVersions("AN", ofKind("AN"), notes),
    frequencies: onlyOne("FQ", ofKind("FQ"), notes),
    sources: onlyOne("SU", ofKind("SU"), notes),
    // Later versions of the flag table hold the earlier ones' flags and more.
    flags: ofKind("FG").sort((a, b) => b.version - a.version)[0],
  };
}
