/**
 * Weights of stored rows turned negative in place, their size kept: w to -|w|. Weights stand in the array, one a sample,
 * or in a column of their own, one for several.
 */
import { CannotHoldFlags } from "../cannot-hold.ts";
import { readStored } from "../fits/stored.ts";
import type { SelectionMatcher } from "../selection-matcher.ts";
import type { SampleLayout } from "./samples.ts";

/** How a number is stored: physical = zero + scale x stored. */
export interface StoredNumber {
  readonly bitpix: number;
  readonly scale: number;
  readonly zero: number;
  readonly blank: number | undefined;
}

/**
 * Makes the selected weights of the row at byte `start` negative; `count` selections of the matcher take samples of it.
 * @throws CannotHoldFlags when that cannot be stored
 */
export type FlipRow = (view: DataView, start: number, matcher: SelectionMatcher, count: number) => void;

/** For arrays with a weight a sample. */
export function sampleFlipper(layout: SampleLayout): FlipRow {
  const offsets = weightOffsets(layout);
  const flip = flipper(layout);
  return (view, start, { matched, runs }, count) => {
    for (let k = 0; k < count; k++) {
      const bounds = runs[matched[k]!]!;
      for (let b = 0; b < bounds.length; b += 2) {
        const end = bounds[b + 1]!;
        for (let i = bounds[b]!; i < end; i++) flip(view, start + offsets[i]!);
      }
    }
  };
}

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

/**
 * For weights that stand for several samples each.
 *
 * @param slots  by sample of a row, in canonical order, the number of its weight
 * @param offset by weight, bytes from the row's start
 * @param covers what one weight stands for, for messages
 */
export function slotFlipper(
  stored: StoredNumber,
  slots: Int32Array,
  offset: readonly number[],
  covers: string,
): FlipRow {
  const flip = flipper(stored);
  const samplesOf = new Int32Array(offset.length);
  for (const slot of slots) samplesOf[slot]! += 1;
  // Rows that the same selections take are alike; there are few kinds of them.
  const known = new Map<string, Int32Array>();
  const taken = new Uint8Array(slots.length);
  const slotsTaken = ({ matched, runs }: SelectionMatcher, count: number): Int32Array => {
    taken.fill(0);
    for (let k = 0; k < count; k++) {
      const bounds = runs[matched[k]!]!;
      for (let b = 0; b < bounds.length; b += 2) taken.fill(1, bounds[b], bounds[b + 1]);
    }
    const counts = new Int32Array(offset.length);
    for (let i = 0; i < slots.length; i++) counts[slots[i]!]! += taken[i]!;
    const partly = counts.findIndex((some, slot) => some > 0 && some < samplesOf[slot]!);
    if (partly >= 0) {
      throw new CannotHoldFlags(
        `one weight stands for ${covers}, and the flags take ${counts[partly]} of its ${samplesOf[partly]} samples`,
      );
    }
    return Int32Array.from(counts.keys()).filter((slot) => counts[slot]! > 0);
  };
  return (view, start, matcher, count) => {
    if (count === 0) return;
    const key = matcher.matched.subarray(0, count).join(",");
    let numbers = known.get(key);
    if (numbers === undefined) {
      numbers = slotsTaken(matcher, count);
      known.set(key, numbers);
    }
    for (let k = 0; k < numbers.length; k++) flip(view, start + offset[numbers[k]!]!);
  };
}

/** Makes the weight at byte `at` negative where it is finite and positive. */
type Flip = (view: DataView, at: number) => void;

function flipper(stored: StoredNumber): Flip {
  const { bitpix, scale, zero } = stored;
  if (zero === 0 && bitpix < 0) {
    return (view, at) => {
      const weight = scale * readStored(view, bitpix, at);
      // The sign is the first bit of the first byte.
      if (weight > 0 && weight < Number.POSITIVE_INFINITY) view.setUint8(at, view.getUint8(at) ^ 0x80);
    };
  }
  return (view, at) => flipScaled(view, at, stored);
}

/** Integers, and anything with an offset: the stored number whose weight is the negative of what is there. */
function flipScaled(view: DataView, at: number, { bitpix, scale, zero, blank }: StoredNumber): void {
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
    `weights are stored as ${kind} with scale ${scale} and zero ${zero}, which cannot hold -${weight}`,
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
