/**
 * The axes of a row's array: found by CTYPE, never by position. They may be the axes of random groups (FITS Standard
 * 4.0, section 6) or of a matrix in a table.
 */
import type { Header } from "../fits/header.ts";
import type { Notes } from "../notes.ts";
import type { Words } from "./words.ts";

export interface ArrayAxis {
  /** the n of CTYPEn */
  readonly number: number;
  /** the keyword of its length */
  readonly lengthKey: string;
  /** upper case, up to the first "-"; empty without CTYPE */
  readonly type: string;
  readonly length: number;
  /** elements of the array from one index to the next */
  readonly stride: number;
  readonly value: number;
  readonly step: number;
  readonly pixel: number;
}

export interface NamedAxes {
  readonly complex: ArrayAxis;
  readonly stokes: ArrayAxis;
  readonly frequency: ArrayAxis;
  readonly subband: ArrayAxis;
  /** undefined where the file has no such axis */
  readonly rightAscension: ArrayAxis | undefined;
  readonly declination: ArrayAxis | undefined;
}

const ABSENT: ArrayAxis = {
  number: 0,
  lengthKey: "",
  type: "",
  length: 1,
  stride: 0,
  value: 1,
  step: 1,
  pixel: 1,
};

/**
 * Axes by CTYPEn, CRVALn, CDELTn and CRPIXn, the first fastest.
 *
 * @param lengths of the axes, and the keyword that each is given by
 */
export function readAxes(
  header: Header,
  lengths: readonly { readonly number: number; readonly lengthKey: string; readonly length: number }[],
): ArrayAxis[] {
  let stride = 1;
  return lengths.map(({ number, lengthKey, length }) => {
    const type = (header.shown(`CTYPE${number}`) ?? "").trim().toUpperCase();
    const axis = {
      number,
      lengthKey,
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

/** @throws InputError where an axis that is needed is missing, or one that has no meaning is longer than 1 */
export function nameAxes(header: Header, axes: readonly ArrayAxis[], words: Words, notes: Notes): NamedAxes {
  const left = new Set(axes);
  const take = (...types: string[]): ArrayAxis | undefined => {
    const found = axes.filter((axis) => types.includes(axis.type) && left.has(axis));
    // Of two axes by one name the longer is meant; two long ones have no meaning, and the second stays unknown.
    const axis = found.sort((a, b) => b.length - a.length)[0];
    if (axis !== undefined) left.delete(axis);
    return axis;
  };
  const complex = requireComplex(header, axes, take("COMPLEX"), words);
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
        `or a COMPLEX, STOKES, FREQ or ${words.subbandAxis.replace(/ axis$/, "")} axis once each`,
      axis.lengthKey,
    );
  }
  return named;
}

function requireComplex(
  header: Header,
  axes: readonly ArrayAxis[],
  complex: ArrayAxis | undefined,
  words: Words,
): ArrayAxis {
  if (complex === undefined) {
    throw header.error(
      `no axis of the ${words.array} is called COMPLEX (found ${listed(axes)}): expected real and imaginary parts`,
      axes[0]?.lengthKey.replace(/\d+$/, ""),
      `The ${words.rows} of this file are not visibilities`,
    );
  }
  if (complex.length !== 2 && complex.length !== 3) {
    throw header.error(
      `the COMPLEX axis has length ${complex.length}: expected 3 (real, imaginary, weight) or 2 (real, imaginary)`,
      complex.lengthKey,
      complex.length === 1
        ? "Length 1 is a packed form that is not for interchange: unpack it first"
        : undefined,
    );
  }
  return complex;
}

/** Channels by velocity or wavelength have no frequency without a rest frame: not read. */
function refuseOtherSpectrum(header: Header, axes: readonly ArrayAxis[]): ArrayAxis {
  const other = axes.find(({ type }) => ["VELO", "FELO", "VRAD", "VOPT", "WAVE", "LAMBDA"].includes(type));
  if (other === undefined) return { ...ABSENT, value: Number.NaN, step: 0 };
  throw header.error(
    `axis ${other.number} is ${other.type}: expected the channels by frequency (FREQ)`,
    `CTYPE${other.number}`,
    "Write the file again with a frequency axis",
  );
}

function listed(axes: readonly ArrayAxis[]): string {
  const names = axes.slice(0, 10).map(({ type }) => (type === "" ? "unnamed" : type));
  return names.length === 0 ? "no axes" : names.join(", ");
}

/** CRVAL + (p - CRPIX) CDELT at the element `i`, from 0. */
export function axisValue(axis: ArrayAxis, i: number): number {
  return axis.value + (i + 1 - axis.pixel) * axis.step;
}
