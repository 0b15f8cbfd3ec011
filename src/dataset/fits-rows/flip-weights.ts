/**
 * Weights of stored samples turned negative in place, their size kept: w to -|w|. One weight a sample, as item of a row's
 * array.
 */
import { CannotHoldFlags } from "../cannot-hold.ts";
import type { SampleBlock } from "../dataset.ts";
import { readStored } from "../fits/stored.ts";
import type { SelectionMatcher } from "../selection-matcher.ts";
import type { SampleLayout } from "./samples.ts";

/** Makes the weight of sample `i` of the row at byte `start` negative. @throws CannotHoldFlags when it cannot */
export type Flip = (view: DataView, start: number, i: number) => void;

/** Where the weight of each sample of a row lies, in canonical order, bytes from the row's start. */
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

export function flipper(layout: SampleLayout): Flip {
  const offsets = weightOffsets(layout);
  const { bitpix, scale, zero } = layout;
  if (zero === 0 && bitpix < 0) {
    return (view, start, i) => {
      const at = start + offsets[i]!;
      const weight = scale * readStored(view, bitpix, at);
      // The sign is the first bit of the first byte.
      if (weight > 0 && weight < Number.POSITIVE_INFINITY) view.setUint8(at, view.getUint8(at) ^ 0x80);
    };
  }
  return (view, start, i) => flipScaled(view, start + offsets[i]!, layout);
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

/**
 * Flip what is selected of some rows.
 *
 * @param first  of `block`'s rows: the one at the start of `bytes`
 * @param rowBytes from one row to the next in `bytes`
 */
export function flipSelected(
  matcher: SelectionMatcher,
  block: SampleBlock,
  first: number,
  rows: number,
  bytes: Uint8Array,
  rowBytes: number,
  flip: Flip,
): void {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const { matched, runs } = matcher;
  for (let row = 0; row < rows; row++) {
    const count = matcher.matchRow(block, first + row);
    const start = row * rowBytes;
    for (let k = 0; k < count; k++) {
      const bounds = runs[matched[k]!]!;
      for (let b = 0; b < bounds.length; b += 2) {
        const end = bounds[b + 1]!;
        for (let i = bounds[b]!; i < end; i++) flip(view, start, i);
      }
    }
  }
}
