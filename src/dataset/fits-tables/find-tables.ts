/** Which tables of a file are used, and what is said of the others. */
import type { FitsFile, Hdu } from "../fits/hdus.ts";
import type { Notes } from "../notes.ts";

/** Says once which extensions are neither needed nor read. */
export function noteSkipped(file: FitsFile, isUsed: (hdu: Hdu) => boolean, notes: Notes): void {
  const skipped = file.hdus
    .slice(1)
    .filter((hdu) => hdu.kind !== "binary table" || !isUsed(hdu))
    .map((hdu) => `${hdu.name === "" ? "unnamed" : hdu.name} (${hdu.kind})`);
  if (skipped.length === 0) return;
  const shown = skipped.slice(0, 12).join(", ");
  const more = skipped.length > 12 ? ` and ${skipped.length - 12} more` : "";
  notes.note("tables-skipped", `not needed and not read: ${shown}${more}`);
}

/** Ascending, the first of each EXTVER. */
export function distinctVersions(kind: string, hdus: readonly Hdu[], notes: Notes): Hdu[] {
  const byVersion = new Map<number, Hdu>();
  for (const hdu of hdus) {
    const earlier = byVersion.get(hdu.version);
    if (earlier === undefined) byVersion.set(hdu.version, hdu);
    else noteTwice(kind, earlier, hdu, notes);
  }
  return [...byVersion.values()].sort((a, b) => a.version - b.version);
}

export function onlyOne(kind: string, hdus: readonly Hdu[], notes: Notes): Hdu | undefined {
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
