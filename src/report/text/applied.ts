/** What `visvet apply` did, or would do, in words. */
import type { Dataset } from "../../dataset/dataset.ts";
import type { SelectionCounts } from "../../dataset/flagged-view.ts";
import type { AcceptedFlag } from "../../flags/accepted.ts";
import { type Applied, placeName } from "../../flags/apply/apply.ts";
import { formatBytes, formatCount, formatPercent } from "../../util/units.ts";
import { Paper } from "./paper.ts";

export interface AppliedText {
  readonly dataset: Dataset;
  readonly flags: readonly AcceptedFlag[];
  readonly skipped: readonly AcceptedFlag[];
  readonly counts: SelectionCounts;
  /** null: a dry run */
  readonly applied: Applied | null;
  /** name of the dataset that the flags were suggested for; null unknown */
  readonly suggestedFor: string | null;
  /** what earlier runs that were killed have left beside the output */
  readonly leftOver: readonly string[];
}

export function appliedText(
  about: AppliedText,
  options: { readonly width: number; readonly colour: boolean },
): string {
  const { dataset, flags, skipped, counts, applied } = about;
  const paper = new Paper(options);
  const count = flags.length === 1 ? "1 flag" : `${flags.length} flags`;
  paper.heading(
    applied === null ? `${count} would be applied to ${dataset.name}` : `${count} applied to ${dataset.name}`,
  );
  if (flags.length > 0) flagRows(paper, flags, counts);
  paper.prose(totals(counts, applied === null));
  if (skipped.length > 0) paper.prose(`Skipped: ${skipped.map(({ id }) => id).join(", ")}.`);
  warnings(paper, about);
  paper.gap();
  if (applied === null) paper.prose("Nothing was written: this was a dry run.");
  else written(paper, dataset, applied);
  return paper.text;
}

function flagRows(paper: Paper, flags: readonly AcceptedFlag[], counts: SelectionCounts): void {
  paper.table(
    [
      { head: "Flag", numeric: false, ink: paper.ink.strong },
      { head: "Samples", numeric: true },
      { head: "Flagged before", numeric: true },
      { head: "New", numeric: true },
      { head: "Rule", numeric: false },
    ],
    flags.map(({ id, rule }, i) => {
      const { samples, unflagged, fresh } = counts.each[i]!;
      return [id, formatCount(samples), formatCount(samples - unflagged), formatCount(fresh), rule];
    }),
  );
  paper.prose(
    "Samples: all it selects. Flagged before: of those, with a weight of zero or less, or not finite. New: neither flagged " +
      "before nor by a flag above.",
    2,
    paper.ink.faint,
  );
  paper.gap();
}

function totals({ union, total }: SelectionCounts, dry: boolean): string {
  const share = total.unflagged === 0 ? 0 : union.unflagged / total.unflagged;
  const verb = dry ? "would be" : "are";
  return (
    `${formatCount(union.unflagged)} samples ${verb} newly flagged, ${formatPercent(share)} of the ` +
    `${formatCount(total.unflagged)} that were not; ${formatCount(union.samples - union.unflagged)} of those selected were ` +
    "flagged or bad already."
  );
}

function warnings(paper: Paper, { dataset, flags, counts, suggestedFor, leftOver }: AppliedText): void {
  const empty = flags.filter((_, i) => counts.each[i]!.samples === 0).map(({ id }) => id);
  if (empty.length > 0) {
    paper.prose(`No sample of this dataset is selected by ${empty.join(", ")}.`, 2, paper.ink.strong);
  }
  if (suggestedFor !== null && suggestedFor !== dataset.name) {
    paper.prose(
      `The flags were suggested for "${suggestedFor}", and this dataset is called "${dataset.name}": make sure that they ` +
        "are the same observation.",
      2,
      paper.ink.strong,
    );
  }
  for (const path of leftOver) {
    paper.prose(
      `A run that was cut short left ${path}: delete it, unless another machine is writing it now.`,
      2,
      paper.ink.strong,
    );
  }
}

function written(paper: Paper, dataset: Dataset, { into, insteadOf, tableRows, paths }: Applied): void {
  if (insteadOf !== null) {
    paper.prose(
      `The flags are in the ${placeName(into)} and not in the ${placeName(insteadOf.place)}: ${insteadOf.why}.`,
    );
  }
  if (into === "flag-table") paper.prose(`Rows added to the flag table: ${formatCount(tableRows)}.`);
  paper.prose("Read back and compared with the dataset sample by sample: as it should be.");
  const size = formatBytes(dataset.bytes);
  for (const path of paths)
    paper.prose(`Wrote ${path}${paths.length === 1 ? ` (the dataset has ${size})` : ""}`);
}
