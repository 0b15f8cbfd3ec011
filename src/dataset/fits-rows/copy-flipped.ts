/** Stored rows copied with the weights of what is selected turned negative; every other byte as it is. */
import type { ByteSink } from "../../util/byte-sink.ts";
import type { Dataset } from "../dataset.ts";
import type { Cursor } from "../fits/byte-source.ts";
import type { SelectionMatcher } from "../selection-matcher.ts";
import type { FlipRow } from "./flip-weights.ts";

const CHUNK_BYTES = 4 * 1024 * 1024;

/** Rows one after another in a file. */
export interface StoredRows {
  /** byte of the first */
  readonly start: number;
  readonly rows: number;
  readonly rowBytes: number;
}

/**
 * @param firstRow the row of the dataset that is the first of these
 * @throws CannotHoldFlags where a weight cannot be made negative
 */
export async function copyFlippedRows(
  cursor: Cursor,
  sink: ByteSink,
  { start, rows, rowBytes }: StoredRows,
  { dataset, firstRow }: { readonly dataset: Dataset; readonly firstRow: number },
  matcher: SelectionMatcher,
  flip: FlipRow,
): Promise<void> {
  const chunkRows = Math.max(1, Math.floor(CHUNK_BYTES / rowBytes));
  const buffer = new Uint8Array(Math.min(chunkRows, rows) * rowBytes);
  const view = new DataView(buffer.buffer);
  for await (const block of dataset.blocks({ want: "rows", rows: [firstRow, firstRow + rows] })) {
    for (let first = 0; first < block.rows; first += chunkRows) {
      const count = Math.min(chunkRows, block.rows - first);
      const bytes = buffer.subarray(0, count * rowBytes);
      await cursor.read(bytes, start + (block.firstRow - firstRow + first) * rowBytes);
      for (let row = 0; row < count; row++) {
        flip(view, row * rowBytes, matcher, matcher.matchRow(block, first + row));
      }
      await sink.write(bytes);
    }
  }
}
