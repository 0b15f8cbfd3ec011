/**
 * A copy of a random-groups file with the weights of selected samples turned negative, their size kept: w to -|w|. The
 * stored items change in place; every other byte is copied as it is.
 */
import type { ByteSink } from "../../util/byte-sink.ts";
import { CannotHoldFlags } from "../cannot-hold.ts";
import type { SampleBlock } from "../dataset.ts";
import { copyBytes } from "../fits/copy.ts";
import type { FitsFile } from "../fits/hdus.ts";
import { readStored } from "../fits/stored.ts";
import { type SampleLayout, sampleLayout } from "../fits-rows/samples.ts";
import { Notes } from "../notes.ts";
import type { RowsOfFile } from "../rows-of-file.ts";
import { compileSelections, type SelectionMatcher } from "../selection-matcher.ts";
import { groupLayout } from "./layout.ts";

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
  const flag = flipper(samples);
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
        flagRows(matcher, block, row, rows, bytes, groupBytes, flag);
        await sink.write(bytes);
      }
    }
    await copyBytes(cursor, sink, hdu.dataStart + hdu.dataBytes, Number.POSITIVE_INFINITY);
  } finally {
    await cursor.close();
  }
}

/** Makes the weight of sample `i` of the group at byte `group` negative. */
type Flip = (view: DataView, group: number, i: number) => void;

function flagRows(
  matcher: SelectionMatcher,
  block: SampleBlock,
  first: number,
  rows: number,
  bytes: Uint8Array,
  groupBytes: number,
  flip: Flip,
): void {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const { matched, runs } = matcher;
  for (let row = 0; row < rows; row++) {
    const count = matcher.matchRow(block, first + row);
    const group = row * groupBytes;
    for (let k = 0; k < count; k++) {
      const bounds = runs[matched[k]!]!;
      for (let b = 0; b < bounds.length; b += 2) {
        const end = bounds[b + 1]!;
        for (let i = bounds[b]!; i < end; i++) flip(view, group, i);
      }
    }
  }
}

/** Where the weight of each sample of a group lies, in canonical order, bytes from the group's start. */
function weightOffsets(layout: SampleLayout): Int32Array {
  const { subbands, channels, polarizations } = layout.shape;
  const offsets = new Int32Array(subbands * channels * polarizations);
  let i = 0;
  for (let subband = 0; subband < subbands; subband++) {
    for (let channel = 0; channel < channels; channel++) {
      for (let p = 0; p < polarizations; p++) {
        offsets[i++] =
          layout.start +
          2 * layout.complexStep +
          subband * layout.subbandStep +
          channel * layout.channelStep +
          p * layout.polarizationStep;
      }
    }
  }
  return offsets;
}

function flipper(layout: SampleLayout): Flip {
  const offsets = weightOffsets(layout);
  const { bitpix, scale, zero } = layout;
  if (zero === 0 && bitpix < 0) {
    return (view, group, i) => {
      const at = group + offsets[i]!;
      const weight = scale * readStored(view, bitpix, at);
      // The sign is the first bit of the first byte.
      if (weight > 0 && weight < Number.POSITIVE_INFINITY) view.setUint8(at, view.getUint8(at) ^ 0x80);
    };
  }
  return (view, group, i) => flipScaled(view, group + offsets[i]!, layout);
}

/** Integers, and anything with BZERO: the stored number whose weight is the negative of what is there. */
function flipScaled(view: DataView, at: number, layout: SampleLayout): void {
  const { bitpix, scale, zero, blank } = layout;
  const stored = readStored(view, bitpix, at);
  const weight = zero + scale * stored;
  if (stored === blank || !(weight > 0 && weight < Number.POSITIVE_INFINITY)) return;
  const wanted = -stored - (2 * zero) / scale;
  const item = bitpix > 0 ? Math.round(wanted) : wanted;
  if (writeStored(view, bitpix, at, item)) {
    const back = readStored(view, bitpix, at);
    if (back !== blank && Math.fround(zero + scale * back) === -Math.fround(weight)) return;
  }
  const kind = bitpix === 8 ? "bytes without a sign" : `items of BITPIX ${bitpix}`;
  throw new CannotHoldFlags(
    `weights are stored as ${kind} with BSCALE ${scale} and BZERO ${zero}, which cannot hold -${weight}`,
  );
}

/** False where the item is out of range. Signs of 64-bit integers change without losing digits. */
function writeStored(view: DataView, bitpix: number, at: number, item: number): boolean {
  switch (bitpix) {
    case -32:
      view.setFloat32(at, item);
      return true;
    case -64:
      view.setFloat64(at, item);
      return true;
    case 8:
      if (item < 0 || item > 255) return false;
      view.setUint8(at, item);
      return true;
    case 16:
      if (item < -32768 || item > 32767) return false;
      view.setInt16(at, item);
      return true;
    case 32:
      if (item < -(2 ** 31) || item > 2 ** 31 - 1) return false;
      view.setInt32(at, item);
      return true;
    default:
      if (Math.abs(item) >= 2 ** 63) return false;
      view.setBigInt64(at, item === -readStored(view, 64, at) ? -view.getBigInt64(at) : BigInt(item));
      return true;
  }
}
