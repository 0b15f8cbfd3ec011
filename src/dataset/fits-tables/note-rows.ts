/** What the rows have that science does not, said once. */
import type { Notes } from "../notes.ts";
import type { RowSummary } from "../row-summary.ts";
import type { Words } from "./words.ts";

/** @param strangeSetups numbers of setups met in the rows that the frequency table does not have */
export function noteRows(
  summary: RowSummary,
  strangeSetups: ReadonlySet<number>,
  words: Words,
  notes: Notes,
): void {
  if (strangeSetups.size > 0) {
    const ids = [...strangeSetups].slice(0, 10).join(", ");
    notes.fault(
      "setup-not-in-table",
      `rows name frequency setup (${words.setup}) ${ids}: taken as the only one there is`,
    );
  }
  if (summary.rowsWithoutTime > 0) {
    notes.fault("time-not-finite", `${summary.rowsWithoutTime} rows have a time (DATE) that is not finite`);
  }
  if (summary.rowsWithoutUvw > 0) {
    notes.fault("uvw-not-finite", `${summary.rowsWithoutUvw} rows have a u, v or w that is not finite`);
  }
}
