/** From a request for rows to the byte ranges that are read for it. Pure arithmetic; nothing is opened here. */
import type { BlockRequest, Shape } from "../dataset.ts";
import type { GroupLayout } from "../random-groups/layout.ts";

/** A block's sample arrays and its bytes of file stay under this, bytes each. */
export const MOST_BLOCK_BYTES = 16 * 1024 * 1024;
/** Without a wish: about what the second-level cache holds, so that a block is decoded and used while it is warm. */
const USUAL_BLOCK_BYTES = 1024 * 1024;
/** Below this a group's array is cheaper read along than skipped. Measured: test/dataset/read.bench.ts. */
const LEAST_SKIPPED_BYTES = 64 * 1024;
/** Rows without samples are small; no more of them at a time than this. */
const MOST_BLOCK_ROWS = 65_536;

export interface ReadPlan {
  readonly firstRow: number;
  /** one past the last */
  readonly endRow: number;
  readonly blockRows: number;
  /** bytes of each row that are read: the parameters alone, or the whole group */
  readonly rowBytes: number;
  /** each row is a read of its own, since most of its group is skipped */
  readonly scattered: boolean;
}

/** A run of rows and the bytes of the file from the first one's start to the last one's end. */
export interface BlockRange {
  readonly firstRow: number;
  readonly rows: number;
  readonly byte: number;
  readonly bytes: number;
}

/** @throws RangeError for rows that the file does not have, or a block of no rows (a defect of the caller) */
export function planReads(layout: GroupLayout, shape: Shape, request: BlockRequest): ReadPlan {
  const { groups, groupBytes, parameterBytes } = layout;
  const [firstRow, endRow] = request.rows ?? [0, groups];
  if (!(Number.isInteger(firstRow) && Number.isInteger(endRow) && 0 <= firstRow && firstRow <= endRow)) {
    throw new RangeError(`rows ${firstRow} to ${endRow}: expected a range of whole numbers`);
  }
  if (endRow > groups) throw new RangeError(`rows ${firstRow} to ${endRow}: the dataset has ${groups}`);
  const wish = request.blockRows;
  if (wish !== undefined && !(Number.isInteger(wish) && wish >= 1)) {
    throw new RangeError(`blockRows is ${wish}: expected a whole number of 1 or more`);
  }
  const scattered = request.want === "rows" && groupBytes - parameterBytes >= LEAST_SKIPPED_BYTES;
  const rowBytes = scattered ? parameterBytes : groupBytes;
  const sampleBytes = 12 * shape.subbands * shape.channels * shape.polarizations;
  const heldBytes = request.want === "rows" ? rowBytes : Math.max(groupBytes, sampleBytes);
  const most = Math.min(MOST_BLOCK_ROWS, Math.max(1, Math.floor(MOST_BLOCK_BYTES / heldBytes)));
  const usual = Math.max(1, Math.floor(USUAL_BLOCK_BYTES / heldBytes));
  const rows = Math.max(1, endRow - firstRow);
  return {
    firstRow,
    endRow,
    blockRows: Math.min(wish ?? usual, most, rows),
    rowBytes,
    scattered,
  };
}

/** The block that starts at `row`. */
export function blockRange(layout: GroupLayout, plan: ReadPlan, row: number): BlockRange {
  const rows = Math.min(plan.blockRows, plan.endRow - row);
  return {
    firstRow: row,
    rows,
    byte: layout.hdu.dataStart + row * layout.groupBytes,
    bytes: (rows - 1) * layout.groupBytes + plan.rowBytes,
  };
}
