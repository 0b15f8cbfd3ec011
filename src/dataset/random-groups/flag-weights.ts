/** A copy of a random-groups file with the weights of selected samples turned negative. */
import type { ByteSink } from "../../util/byte-sink.ts";
import { CannotHoldFlags } from "../cannot-hold.ts";
import { copyBytes } from "../fits/copy.ts";
import type { FitsFile } from "../fits/hdus.ts";
import { copyFlippedRows } from "../fits-rows/copy-flipped.ts";
import { sampleFlipper } from "../fits-rows/flip-weights.ts";
import { Notes } from "../notes.ts";
import type { RowsOfFile } from "../rows-of-file.ts";
import { compileSelections } from "../selection-matcher.ts";
import { groupLayout } from "./layout.ts";
import { sampleLayout } from "./row-store.ts";

/** @throws CannotHoldFlags where a weight cannot be made negative without changing its size */
export async function copyFlaggingWeights(file: FitsFile, rows: RowsOfFile, sink: ByteSink): Promise<void> {
  const layout = groupLayout(file.hdus[0], new Notes());
  const samples = sampleLayout(layout);
  if (!samples.hasWeight) {
    throw new CannotHoldFlags("the file has one weight for all samples of a group, if any");
  }
  const matcher = compileSelections(rows.dataset, rows.selections);
  const { groups, groupBytes, hdu } = layout;
  const stored = { start: hdu.dataStart, rows: groups, rowBytes: groupBytes };
  const cursor = await file.source.cursor();
  try {
    await copyBytes(cursor, sink, 0, stored.start);
    await copyFlippedRows(cursor, sink, stored, rows, matcher, sampleFlipper(samples));
    await copyBytes(cursor, sink, hdu.dataStart + hdu.dataBytes, Number.POSITIVE_INFINITY);
  } finally {
    await cursor.close();
  }
}
