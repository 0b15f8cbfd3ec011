/** What keeps the channel averages of the rows until they become Tracks. */
import type { Accumulator } from "./accumulator.ts";
import type { TracksWithoutScans } from "./track-columns.ts";

export interface TrackKeeper extends Accumulator {
  /** So many rows are about to be added, at most: room for them can be made at once. */
  expect?(rows: number): void;
  /** Bytes of the rows kept; undefined: there is a bound on them anyhow */
  readonly bytes?: number;
  /** Sorted by baseline, then time. @param places  new number of each baseline */
  tracks(places: Int32Array): TracksWithoutScans;
  /** Rows that repeat an earlier (time, baseline, field, setup, sub-array). */
  duplicates(tracks: TracksWithoutScans, times: Float64Array): number;
}
