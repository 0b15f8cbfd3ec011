/** From a request for rows to the byte ranges that are read for it. Pure arithmetic; nothing is opened here. */
import type { Place } from "../../util/errors.ts";
import type { BlockRequest, Shape } from "../dataset.ts";

/** A block's sample arrays and its bytes of file stay under this, bytes each. */
export const MOST_BLOCK_BYTES = 16 * 1024 * 1024;
/** Without a wish: about what the second-level cache holds, so that a block is decoded and used while it is warm. */
const USUAL_BLOCK_BYTES = 1024 * 1024;
/** Fewer bytes of a row are cheaper read along than skipped. Measured: test/dataset/read.bench.ts. */
const LEAST_SKIPPED_BYTES = 64 * 1024;
/** Rows without samples are small; no more of them at a time than this. */
const MOST_BLOCK_ROWS = 65_536;

/** A run of bytes of a row. */
export interface Piece {
  /** from the start of the row */
  readonly offset: number;
  readonly bytes: number;
}

/** Rows of one size, one after another in a file: groups, or those of a table. */
export interface RowStore {
  /** file and HDU, for messages */
  readonly place: Place;
  /** "group" or "row", for messages */
  readonly word: string;
  /** byte of the first row */
  readonly start: number;
  readonly rows: number;
  readonly rowBytes: number;
  /** what is needed of each row for its columns alone, and with its weights, in any order */
  readonly needs: Readonly<Record<"rows" | "weights", readonly Piece[]>>;
}

export interface ReadPlan {
  readonly firstRow: number;
  /** one past the last */
  readonly endRow: number;
  readonly blockRows: number;
  /** parts of each row that are read, ascending: the row as a whole, or less */
  readonly pieces: readonly Piece[];
  /** bytes of each row that are read */
  readonly rowBytes: number;
  /** the pieces are reads of their own, since most of each row is skipped */
  readonly scattered: boolean;
}

/** A run of rows and the bytes of the file from the first one's start to the last one's end. */
export interface BlockRange {
  readonly firstRow: number;
  readonly rows: number;
  readonly byte: number;
  readonly bytes: number;
}

/**
 * The rows that a request asks for.
 *
 * @throws RangeError for rows that the dataset does not have, or a block of no rows (a defect of the caller)
 */
export function requestedRows(rows: number, request: BlockRequest): readonly [number, number] {
  const [firstRow, endRow] = request.rows ?? [0, rows];
  if (!(Number.isInteger(firstRow) && Number.isInteger(endRow) && 0 <= firstRow && firstRow <= endRow)) {
    throw new RangeError(`rows ${firstRow} to ${endRow}: expected a range of whole numbers`);
  }
  if (endRow > rows) throw new RangeError(`rows ${firstRow} to ${endRow}: the dataset has ${rows}`);
  const wish = request.blockRows;
  if (wish !== undefined && !(Number.isInteger(wish) && wish >= 1)) {
    throw new RangeError(`blockRows is ${wish}: expected a whole number of 1 or more`);
  }
  return [firstRow, endRow];
}

/** @throws RangeError as `requestedRows` */
export function planReads(store: RowStore, shape: Shape, request: BlockRequest): ReadPlan {
  const [firstRow, endRow] = requestedRows(store.rows, request);
  const whole: Piece = { offset: 0, bytes: store.rowBytes };
  const needed = request.want === "samples" ? [whole] : mergedPieces(store.needs[request.want]);
  const neededBytes = needed.reduce((sum, { bytes }) => sum + bytes, 0);
  const scattered = store.rowBytes - neededBytes >= LEAST_SKIPPED_BYTES;
  const rowBytes = scattered ? neededBytes : store.rowBytes;
  const sampleBytes = 12 * shape.subbands * shape.channels * shape.polarizations;
  const heldBytes = request.want === "rows" ? rowBytes : Math.max(rowBytes, sampleBytes);
  const most = Math.min(MOST_BLOCK_ROWS, Math.max(1, Math.floor(MOST_BLOCK_BYTES / heldBytes)));
  const usual = Math.max(1, Math.floor(USUAL_BLOCK_BYTES / heldBytes));
  const rows = Math.max(1, endRow - firstRow);
  return {
    firstRow,
    endRow,
    blockRows: Math.min(request.blockRows ?? usual, most, rows),
    pieces: scattered ? needed : [whole],
    rowBytes,
    scattered,
  };
}

/** Pieces in ascending order; small gaps are read along. */
export function mergedPieces(pieces: readonly Piece[]): Piece[] {
  const merged: { offset: number; bytes: number }[] = [];
  for (const { offset, bytes } of [...pieces].sort((a, b) => a.offset - b.offset)) {
    const last = merged.at(-1);
    if (last === undefined || offset - (last.offset + last.bytes) >= LEAST_SKIPPED_BYTES) {
      merged.push({ offset, bytes });
    } else {
      last.bytes = Math.max(last.bytes, offset + bytes - last.offset);
    }
  }
  return merged;
}

/** Where a byte of the row is found among the pieces that were read of it. */
export function placeInPieces(pieces: readonly Piece[], offset: number): number {
  let before = 0;
  for (const piece of pieces) {
    if (offset < piece.offset + piece.bytes) return before + offset - piece.offset;
    before += piece.bytes;
  }
  throw new RangeError(`byte ${offset} of the row is not read`);
}

/** The block that starts at `row`. */
export function blockRange(store: RowStore, plan: ReadPlan, row: number): BlockRange {
  const rows = Math.min(plan.blockRows, plan.endRow - row);
  const last = plan.pieces.at(-1)!;
  return {
    firstRow: row,
    rows,
    byte: store.start + row * store.rowBytes,
    bytes: (rows - 1) * store.rowBytes + last.offset + last.bytes,
  };
}
