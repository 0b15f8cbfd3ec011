/**
 * What the primary header of a random-groups file says of a group: its parameters and the axes of its array.
 * Axes are found by CTYPE, parameters by PTYPE, never by position. FITS Standard 4.0, section 6.
 */

import { axisLengths, bitpixOf, type Hdu } from "../fits/hdus.ts";
import type { Header } from "../fits/header.ts";
import { scaling } from "../fits/image.ts";
import type { Notes } from "../notes.ts";

/** Largest group read, bytes. Rows are converted whole; the largest correlators stay well below. */
export const MOST_GROUP_BYTES = 512 * 1024 * 1024;

export interface GroupAxis {
  /** the n of CTYPEn */
  readonly number: number;
  /** upper case, up to the first "-"; empty without CTYPE */
  readonly type: string;
  readonly length: number;
  /** elements of the array from one index to the next */
  readonly stride: number;
  readonly value: number;
  readonly step: number;
  readonly pixel: number;
}

export interface GroupParameter {
  /** upper case, as written */
  readonly name: string;
  /** place in the group, from 0 */
  readonly index: number;
  /** physical = zero + scale x stored */
  readonly scale: number;
  readonly zero: number;
}

export interface GroupLayout {
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
  readonly complex: GroupAxis;
  readonly stokes: GroupAxis;
  readonly frequency: GroupAxis;
  readonly subband: GroupAxis;
  /** undefined where the file has no such axis */
  readonly rightAscension: GroupAxis | undefined;
  readonly declination: GroupAxis | undefined;
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
  const axes = readAxes(header);
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
    ...nameAxes(header, axes, notes),
  };
}

function readAxes(header: Header): GroupAxis[] {
  let stride = 1;
  return axisLengths(header)
    .slice(1)
    .map((length, i) => {
      const number = i + 2;
      const type = (header.shown(`CTYPE${number}`) ?? "").trim().toUpperCase();
      const axis = {
        number,
        type: type.split("-")[0]!,
        length,
        stride,
        value: header.number(`CRVAL${number}`) ?? 0,
        step: header.number(`CDELT${number}`) ?? 0,
        pixel: header.number(`CRPIX${number}`) ?? 1,
      };
      stride *= length;
      return axis;
    });
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

type NamedAxes = Pick<
  GroupLayout,
  "complex" | "stokes" | "frequency" | "subband" | "rightAscension" | "declination"
>;

const ABSENT = { number: 0, type: "", length: 1, stride: 0, value: 1, step: 1, pixel: 1 } as const;

function nameAxes(header: Header, axes: readonly GroupAxis[], notes: Notes): NamedAxes {
  const left = new Set(axes);
  const take = (...types: string[]): GroupAxis | undefined => {
    const found = axes.filter((axis) => types.includes(axis.type) && left.has(axis));
    // Of two axes by one name the longer is meant; two long ones have no meaning, and the second stays unknown.
    const axis = found.sort((a, b) => b.length - a.length)[0];
    if (axis !== undefined) left.delete(axis);
    return axis;
  };
  const complex = take("COMPLEX");
  if (complex === undefined) {
    throw header.error(
      `no axis of the group is called COMPLEX (found ${listed(axes)}): expected real and imaginary parts`,
      "NAXIS",
      "The groups of this file are not visibilities",
    );
  }
  if (complex.length !== 2 && complex.length !== 3) {
    throw header.error(
      `the COMPLEX axis has length ${complex.length}: expected 3 (real, imaginary, weight) or 2 (real, imaginary)`,
      `NAXIS${complex.number}`,
      complex.length === 1
        ? "Length 1 is a packed form that is not for interchange: unpack it first"
        : undefined,
    );
  }
  const stokes = take("STOKES");
  if (stokes === undefined) {
    const text = "no STOKES axis: the one polarization is taken as Stokes I";
    notes.note("missing-stokes-axis", text);
  }
  const named = {
    complex,
    stokes: stokes ?? ABSENT,
    frequency: take("FREQ") ?? refuseOtherSpectrum(header, axes),
    subband: take("IF", "BAND") ?? ABSENT,
    rightAscension: take("RA"),
    declination: take("DEC"),
  };
  for (const axis of [...left, named.rightAscension, named.declination]) {
    if (axis === undefined || axis.length === 1) continue;
    throw header.error(
      `axis ${axis.number}${axis.type === "" ? "" : ` (${axis.type})`} has length ${axis.length}: expected 1, ` +
        "or a COMPLEX, STOKES, FREQ or IF axis once each",
      `NAXIS${axis.number}`,
    );
  }
  return named;
}

/** Channels by velocity or wavelength have no frequency without a rest frame: not read. */
function refuseOtherSpectrum(header: Header, axes: readonly GroupAxis[]): GroupAxis {
  const other = axes.find(({ type }) => ["VELO", "FELO", "VRAD", "VOPT", "WAVE", "LAMBDA"].includes(type));
  if (other === undefined) return { ...ABSENT, value: Number.NaN, step: 0 };
  throw header.error(
    `axis ${other.number} is ${other.type}: expected the channels by frequency (FREQ)`,
    `CTYPE${other.number}`,
    "Write the file again with a frequency axis",
  );
}

function listed(axes: readonly GroupAxis[]): string {
  const names = axes.slice(0, 10).map(({ type }) => (type === "" ? "unnamed" : type));
  return names.length === 0 ? "no axes" : names.join(", ");
}

/** CRVAL + (p - CRPIX) CDELT at the element `i`, from 0. */
export function axisValue(axis: GroupAxis, i: number): number {
  return axis.value + (i + 1 - axis.pixel) * axis.step;
}
