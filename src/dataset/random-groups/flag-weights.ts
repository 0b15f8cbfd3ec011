/**
 * A copy of a random-groups file with the weights of selected samples turned negative, their size kept: w to -|w|. The
 * stored items change in place; every other byte is copied as it is.
 */
import type { ByteSink } from "../../util/byte-sink.ts";
import { CannotHoldFlags } from "../cannot-hold.ts";
import { copyBytes } from "../fits/copy.ts";
import type { FitsFile } from "../fits/hdus.ts";
import { flipper, flipSelected } from "../fits-rows/flip-weights.ts";
import { Notes } from "../notes.ts";
import type { RowsOfFile } from "../rows-of-file.ts";
import { compileSelections } from "../selection-matcher.ts";
import { groupLayout } from "./layout.ts";
import { sampleLayout } from "./row-store.ts";

const CHUNK_BYTES = 4 * 1024 * 1024;

/**
 * @throws CannotHoldFlags where a weight cannot be made negative without changing its size
 */
export async function copyFlaggingWeights(
  file: FitsFile,
  { dataset, firstRow, selections }: RowsOfFile,
  sink: ByteSink,
): Promise<void> {
  const layout = groupLayout(file.hdus[0], new Notes());
  const samples = sampleLayout(layout);
  if (!samples.hasWeight) {
    throw new CannotHoldFlags("the file has one weight for all samples of a group, if any");
  }
  const matcher = compileSelections(dataset, selections);
  const flip = flipper(samples);
  const { groupBytes, hdu } = layout;
  const chunkRows = Math.max(1, Math.floor(CHUNK_BYTES / groupBytes));
  const buffer = new Uint8Array(Math.min(chunkRows, layout.groups) * groupBytes);
  const cursor = await file.source.cursor();
  try {
    await copyBytes(cursor, sink, 0, hdu.dataStart);
    const range = [firstRow, firstRow + layout.groups] as const;
    for await (const block of dataset.blocks({ want: "rows", rows: range })) {
      for (let row = 0; row < block.rows; row += chunkRows) {
        const rows = Math.min(chunkRows, block.rows - row);
        const bytes = buffer.subarray(0, rows * groupBytes);
        await cursor.read(bytes, hdu.dataStart + (block.firstRow - firstRow + row) * groupBytes);
        flipSelected(matcher, block, row, rows, bytes, groupBytes, flip);
        await sink.write(bytes);
      }
    }
    await copyBytes(cursor, sink, hdu.dataStart + hdu.dataBytes, Number.POSITIVE_INFINITY);
  } finally {
    await cursor.close();
  }
}
