/** How the files of a dataset follow each other in time, as notes. */
import { basename } from "node:path";
import { SECONDS_PER_DAY } from "../../util/constants.ts";
import { formatDuration } from "../../util/units.ts";
import type { Notes } from "../notes.ts";
import type { RowSummary } from "../row-summary.ts";

/** A pause of this many integrations and this many seconds is a gap: what ends a scan. */
const GAP_INTEGRATIONS = 5;
const GAP_SECONDS = 60;

export interface FileTimes {
  readonly path: string;
  readonly summary: RowSummary;
}

export interface FileInTime extends FileTimes {
  /** indices in the dataset of the setups that its rows have */
  readonly setups: readonly number[];
}

/** Indices in the order of the first time, then of the last, then of the names; files without a time last. */
export function inTimeOrder(files: readonly FileTimes[]): number[] {
  const known = (time: number) => (Number.isNaN(time) ? Number.POSITIVE_INFINITY : time);
  const ascending = (a: number, b: number) => (a < b ? -1 : a > b ? 1 : 0);
  return files
    .map((_, i) => i)
    .sort((i, j) => {
      const [a, b] = [files[i]!, files[j]!];
      return (
        ascending(known(a.summary.firstTime), known(b.summary.firstTime)) ||
        ascending(known(a.summary.lastTime), known(b.summary.lastTime)) ||
        ascending(i, j)
      );
    });
}

/** @param files in the order of time */
export function noteTimeRanges(files: readonly FileInTime[], notes: Notes): void {
  let latest: FileInTime | undefined;
  let longest: { seconds: number; before: string; after: string } | undefined;
  let gaps = 0;
  for (const file of files) {
    const { firstTime, lastTime, longestIntegration } = file.summary;
    if (Number.isNaN(firstTime)) continue;
    if (latest !== undefined) {
      const between = (firstTime - latest.summary.lastTime) * SECONDS_PER_DAY;
      if (between <= 0) noteOverlap(latest, file, notes);
      // NaN where the file does not say.
      const integration = longestIntegration || 0;
      if (between > Math.max(GAP_SECONDS, GAP_INTEGRATIONS * integration)) {
        gaps += 1;
        const seconds = between - integration;
        if (longest === undefined || seconds > longest.seconds) {
          longest = { seconds, before: basename(latest.path), after: basename(file.path) };
        }
      }
    }
    if (latest === undefined || lastTime > latest.summary.lastTime) latest = file;
  }
  if (longest !== undefined) {
    const { seconds, before, after } = longest;
    const text =
      gaps === 1
        ? `the files leave a gap in time: ${formatDuration(seconds)} between ${before} and ${after}`
        : `the files leave ${gaps} gaps in time, the longest ${formatDuration(seconds)} between ${before} and ${after}`;
    notes.note("gap-between-files", text);
  }
}

function noteOverlap(earlier: FileInTime, later: FileInTime, notes: Notes): void {
  const until = Math.min(earlier.summary.lastTime, later.summary.lastTime);
  const seconds = (until - later.summary.firstTime) * SECONDS_PER_DAY;
  if (!later.setups.some((setup) => earlier.setups.includes(setup))) {
    const text = `${basename(earlier.path)} and ${basename(later.path)} hold other frequencies at the same times`;
    notes.note("frequencies-side-by-side", text);
    return;
  }
  const long = seconds > 0 ? `by ${formatDuration(seconds)}` : "in one integration";
  notes.note(
    "files-overlap",
    `${basename(earlier.path)} and ${basename(later.path)} overlap in time ${long}: rows that are in both count twice, ` +
      "and others step back in time",
  );
}
