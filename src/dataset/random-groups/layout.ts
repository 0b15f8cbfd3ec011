/**
 * What the primary header of a random-groups file says of a group: its parameters and the axes of its array.
 * Axes are found by CTYPE, parameters by PTYPE, never by position. FITS Standard 4.0, section 6.
 */

import { axisLengths, bitpixOf, type Hdu } from "../fits/hdus.ts";
import type { Header } from "../fits/header.ts";
import { scaling } from "../fits/image.ts";
import { type NamedAxes, nameAxes, readAxes } from "../fits-tables/axes.ts";
import type { Notes } from "../notes.ts";
import { WORDS } from "./words.ts";

/** Largest group read, bytes. Rows are converted whole; the largest correlators stay well below. */
export const MOST_GROUP_BYTES = 512 * 1024 * 1024;

export interface GroupParameter {
  /** upper case, as written */
  readonly name: string;
  /** place in the group, from 0 */
  readonly index: number;
  /** physical = zero + scale x stored */
  readonly scale: number;
  readonly zero: number;
}

export interface GroupLayout extends NamedAxes {
  readonly hdu: Hdu;
  readonly bitpix: number;
  readonly itemBytes: number;
  readonly groups: number;
  readonly groupBytes: number;
  /** bytes of the parameters, before the array */
  readonly parameterBytes: number;
  readonly parameters: readonly GroupParameter[];
  /** BSCALE, BZERO, BLANK of the array */
  readonly scale: number;
  readonly zero: number;
  readonly blank: number | undefined;
}

/** @throws InputError naming the keyword for every header that is not that of a visibility group */
export function groupLayout(hdu: Hdu, notes: Notes): GroupLayout {
  const { header } = hdu;
  const bitpix = bitpixOf(header);
  const itemBytes = Math.abs(bitpix) / 8;
  const groups = header.integer("GCOUNT", 0) ?? 1;
  if (groups === 0) throw header.error("GCOUNT is 0: the file holds no visibilities", "GCOUNT");
  const parameterCount = header.integer("PCOUNT", 0) ?? 0;
  if (parameterCount === 0) {
    throw header.error("PCOUNT is 0: expected parameters such as UU, VV, WW, BASELINE and DATE", "PCOUNT");
  }
  const lengths = axisLengths(header).map((length, i) => ({
    number: i + 1,
    lengthKey: `NAXIS${i + 1}`,
    length,
  }));
  // The first one, of length 0, is the mark of random groups.
  const axes = readAxes(header, lengths.slice(1));
  const elements = axes.reduce((product, axis) => product * axis.length, 1);
  const groupBytes = itemBytes * (parameterCount + elements);
  if (elements === 0) throw header.error("an axis of the group has length 0: expected 1 or more", "NAXIS");
  if (groupBytes > MOST_GROUP_BYTES) {
    throw header.error(
      `a group takes ${groupBytes} bytes: expected at most ${MOST_GROUP_BYTES}`,
      "NAXIS",
      "Split the file by sub-band or channel",
    );
  }
  return {
    hdu,
    bitpix,
    itemBytes,
    groups,
    groupBytes,
    parameterBytes: itemBytes * parameterCount,
    parameters: readParameters(header, parameterCount),
    ...scaling(header, bitpix),
    ...nameAxes(header, axes, WORDS, notes),
  };
}

function readParameters(header: Header, count: number): GroupParameter[] {
  // PTYPEn beyond 999 has no keyword; such a group is no visibility.
  if (count > 999) throw header.error(`PCOUNT is ${count}: expected at most 999`, "PCOUNT");
  return Array.from({ length: count }, (_, index) => ({
    name: (header.shown(`PTYPE${index + 1}`) ?? "").trim().toUpperCase(),
    index,
    scale: header.number(`PSCAL${index + 1}`) ?? 1,
    zero: header.number(`PZERO${index + 1}`) ?? 0,
  }));
}
