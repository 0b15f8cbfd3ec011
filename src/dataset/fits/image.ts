/** The array of a primary or IMAGE HDU, in runs of any length. FITS Standard 4.0, sections 5 and 7.1. */

import type { Cursor } from "./byte-source.ts";
import { axisLengths, bitpixOf, type Hdu } from "./hdus.ts";
import type { Header } from "./header.ts";
import { readStored } from "./stored.ts";

export interface ImageLayout {
  readonly hdu: Hdu;
  readonly bitpix: number;
  /** first axis fastest; empty when there is no array */
  readonly axes: readonly number[];
  readonly elements: number;
  /** physical = zero + scale x stored */
  readonly scale: number;
  readonly zero: number;
  /** the stored integer that means undefined */
  readonly blank: number | undefined;
}

/** @throws InputError when the HDU is no image or its header is malformed */
export function imageLayout(hdu: Hdu): ImageLayout {
  const { header } = hdu;
  if (hdu.kind !== "image") throw header.error(`this is a ${hdu.kind}: expected an image`);
  const bitpix = bitpixOf(header);
  const axes = axisLengths(header);
  return {
    hdu,
    bitpix,
    axes,
    elements: hdu.dataBytes / (Math.abs(bitpix) / 8),
    ...scaling(header, bitpix),
  };
}

/** BSCALE, BZERO and BLANK, which only integers have. */
export function scaling(
  header: Header,
  bitpix: number,
): { scale: number; zero: number; blank: number | undefined } {
  return {
    scale: header.number("BSCALE") ?? 1,
    zero: header.number("BZERO") ?? 0,
    blank: bitpix > 0 ? header.number("BLANK") : undefined,
  };
}

/**
 * Elements [first, first + values.length) as physical values; undefined ones are NaN.
 *
 * @param values out, the first axis fastest
 * @throws InputError when the file is shorter than it was
 */
export async function readImage(
  cursor: Cursor,
  layout: ImageLayout,
  first: number,
  values: Float64Array,
): Promise<void> {
  const { bitpix, elements, hdu, scale, zero, blank } = layout;
  if (!(first >= 0 && first + values.length <= elements)) {
    throw new RangeError(`elements ${first} to ${first + values.length} of ${elements}`);
  }
  const itemBytes = Math.abs(bitpix) / 8;
  const most = 1 << 17;
  const bytes = new Uint8Array(Math.min(values.length, most) * itemBytes);
  const view = new DataView(bytes.buffer);
  for (let done = 0; done < values.length; done += most) {
    const count = Math.min(most, values.length - done);
    const at = hdu.dataStart + (first + done) * itemBytes;
    const got = await cursor.read(bytes.subarray(0, count * itemBytes), at);
    if (got < count * itemBytes) throw hdu.header.error(`the file now ends at byte ${at + got}`);
    for (let i = 0; i < count; i++) {
      const stored = readStored(view, bitpix, i * itemBytes);
      values[done + i] = stored === blank ? Number.NaN : zero + scale * stored;
    }
  }
}
