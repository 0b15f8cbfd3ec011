/** The files of a joined dataset: opened when they are asked for, few at a time. */
import { openFitsDataset } from "../open-fits.ts";
import type { OpenedDataset, RowSummary } from "../row-summary.ts";

/** Tables of this many files are held; of the others only what the join made of them. */
const MOST_OPEN = 16;

export class Parts {
  readonly paths: readonly string[];
  readonly known: readonly RowSummary[];
  readonly #open = new Map<number, OpenedDataset>();

  /** @param known of each file: no pass over its rows when it is opened again */
  constructor(paths: readonly string[], known: readonly RowSummary[]) {
    this.paths = paths;
    this.known = known;
  }

  /** @throws InputError where the file has gone or changed */
  async open(part: number): Promise<OpenedDataset> {
    const opened = this.#open.get(part) ?? (await openFitsDataset(this.paths[part]!, this.known[part]!));
    // The one asked for last is dropped last.
    this.#open.delete(part);
    this.#open.set(part, opened);
    for (const oldest of this.#open.keys()) {
      if (this.#open.size <= MOST_OPEN) break;
      this.#open.delete(oldest);
    }
    return opened;
  }
}
