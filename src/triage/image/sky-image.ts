/** A plane of a FITS image on the sky, cut to what is looked at. */
import { axisLengths, type Hdu, openFits } from "../../dataset/fits/hdus.ts";
import type { Header } from "../../dataset/fits/header.ts";
import { type ImageLayout, imageLayout, readImage } from "../../dataset/fits/image.ts";
import { openSource } from "../../dataset/fits/source.ts";
import { InputError } from "../../util/errors.ts";
import { formatFrequency } from "../../util/units.ts";
import { type SkyAxes, skyAxes } from "./projection.ts";

export interface SkyImage {
  /** path as given; hostile text */
  readonly file: string;
  /** pixels along right ascension and along declination */
  readonly width: number;
  readonly height: number;
  /** (height x width) row by row; 0 where the file has no value */
  readonly pixels: Float64Array;
  /** (height x width) 1 where the file has a value */
  readonly known: Uint8Array;
  readonly sky: SkyAxes;
  /** pixel of the whole plane that is the window's first, along right ascension and declination */
  readonly corner: readonly [number, number];
  /** of the whole plane */
  readonly size: readonly [number, number];
  /** BUNIT; hostile text */
  readonly unit: string;
  /** Gaussian of the restoring beam: radians, and its angle from north through east; null where the header has none */
  readonly beam: { readonly major: number; readonly minor: number; readonly angle: number } | null;
  /** Hz, of the plane read out of several; null where the image has one for all */
  readonly plane: { readonly low: number; readonly high: number } | null;
  /** what was chosen or passed over, sentences */
  readonly notes: readonly string[];
}

/** More pixels a side are not transformed: the middle of a larger image is looked at. */
export const MOST_PIXELS = 1024;
/** Fewer show neither stripes nor rings. */
const LEAST_PIXELS = 16;

/** @throws InputError when it is no image of the sky, or none of the kinds that are read */
export async function readSkyImage(path: string): Promise<SkyImage> {
  const source = await openSource(path);
  const { hdus } = await openFits(source);
  const hdu = hdus.find(isSkyImage);
  if (hdu === undefined) throw noImage(path, hdus);
  const layout = imageLayout(hdu);
  const sky = skyAxes(hdu.header, layout.axes);
  const [ra, dec] = sky.axes;
  const size = [layout.axes[ra]!, layout.axes[dec]!] as const;
  if (Math.min(...size) < LEAST_PIXELS) {
    throw hdu.header.error(
      `the image is ${size[0]} x ${size[1]} pixels: expected ${LEAST_PIXELS} or more a side`,
    );
  }
  const x = windowOf(size[0], sky.reference[0]);
  const y = windowOf(size[1], sky.reference[1]);
  const cursor = await source.cursor();
  try {
    const raw = await readPlane(cursor, layout, sky.axes, x, y);
    const plane = planeOf(hdu.header, layout);
    const { pixels, known } = splitKnown(raw);
    refuseEmpty(hdu.header, pixels, known);
    return {
      file: path,
      width: x.length,
      height: y.length,
      pixels,
      known,
      sky,
      corner: [x.first, y.first],
      size,
      unit: (hdu.header.shown("BUNIT") ?? "").trim(),
      beam: beamOf(hdu.header),
      plane: plane.range,
      notes: [...plane.notes, ...windowNotes(size, x, y), ...projectionNotes(sky), ...blankNotes(known)],
    };
  } finally {
    await cursor.close();
  }
}

function isSkyImage(hdu: Hdu): boolean {
  if (hdu.kind !== "image" || hdu.dataBytes === 0) return false;
  const lengths = axisLengths(hdu.header);
  return (
    lengths.length >= 2 && lengths.some((_, i) => /^RA(-|$)/i.test(hdu.header.shown(`CTYPE${i + 1}`) ?? ""))
  );
}

function noImage(path: string, hdus: readonly Hdu[]): InputError {
  const first = hdus.find(({ kind, dataBytes }) => kind === "image" && dataBytes > 0);
  if (first !== undefined) {
    return first.header.error(
      `no axis of right ascension among ${axisLengths(first.header).length} axes (CTYPEn)`,
      undefined,
      "Give an image of the sky in equatorial coordinates",
    );
  }
  const advice =
    hdus[0]?.kind === "random groups"
      ? "This is a file of visibilities: name the image made from them with --image, the visibilities as DATASET"
      : "Give the image with --image, a FITS file with a two-dimensional array";
  return new InputError("no image in this file", { file: path }, advice);
}

/** Numbers between two pixels of a row that are read and dropped rather than passed over. */
const MOST_BETWEEN = 512;

interface Window {
  readonly first: number;
  readonly length: number;
}

/** All of a short axis; of a long one the stretch about the reference pixel. */
function windowOf(length: number, reference: number): Window {
  if (length <= MOST_PIXELS) return { first: 0, length };
  const middle = reference >= 0 && reference < length ? Math.round(reference) : length >> 1;
  const first = Math.max(0, Math.min(length - MOST_PIXELS, middle - (MOST_PIXELS >> 1)));
  return { first, length: MOST_PIXELS };
}

async function readPlane(
  cursor: Parameters<typeof readImage>[0],
  layout: ImageLayout,
  [ra, dec]: readonly [number, number],
  x: Window,
  y: Window,
): Promise<Float64Array> {
  const strides = layout.axes.map((_, i) => layout.axes.slice(0, i).reduce((product, n) => product * n, 1));
  const plane = new Float64Array(x.length * y.length);
  // The faster of the two celestial axes is read along; every other axis stays at its first plane.
  const along = strides[ra]! < strides[dec]! ? { axis: ra, window: x } : { axis: dec, window: y };
  const across = along.axis === ra ? { axis: dec, window: y } : { axis: ra, window: x };
  const stride = strides[along.axis]!;
  // Where the planes of another axis lie between the pixels, a run would hold all of them.
  const step = stride > MOST_BETWEEN ? along.window.length : 1;
  const run = new Float64Array(step === 1 ? (along.window.length - 1) * stride + 1 : 1);
  for (let k = 0; k < across.window.length; k++) {
    const first = (across.window.first + k) * strides[across.axis]! + along.window.first * stride;
    if (step === 1) await readImage(cursor, layout, first, run);
    for (let i = 0; i < along.window.length; i++) {
      if (step > 1) await readImage(cursor, layout, first + i * stride, run);
      const at = along.axis === ra ? k * x.length + i : i * x.length + k;
      plane[at] = run[step === 1 ? i * stride : 0]!;
    }
  }
  return plane;
}

function splitKnown(raw: Float64Array): { pixels: Float64Array; known: Uint8Array } {
  const known = new Uint8Array(raw.length);
  for (let i = 0; i < raw.length; i++) {
    if (Number.isFinite(raw[i]!)) known[i] = 1;
    else raw[i] = 0;
  }
  return { pixels: raw, known };
}

function refuseEmpty(header: Header, pixels: Float64Array, known: Uint8Array): void {
  const count = known.reduce((sum, one) => sum + one, 0);
  if (count < pixels.length / 10) {
    throw header.error(
      `${count} of ${pixels.length} pixels have a value: expected a tenth of them or more`,
      undefined,
      "Give the image before what lies outside the primary beam is blanked",
    );
  }
  let most = 0;
  for (const value of pixels) most = Math.max(most, Math.abs(value));
  if (most === 0) throw header.error("every pixel is zero: there is nothing to look at");
}

/** The first plane of every other axis, and what the frequency axis says of it. */
function planeOf(header: Header, { axes }: ImageLayout): { range: SkyImage["plane"]; notes: string[] } {
  const notes: string[] = [];
  let range: SkyImage["plane"] = null;
  axes.forEach((length, i) => {
    const name = (header.shown(`CTYPE${i + 1}`) ?? "").trim().toUpperCase();
    if (/^(RA|DEC)(-|$)/.test(name)) return;
    const value =
      (header.number(`CRVAL${i + 1}`) ?? 0) +
      (1 - (header.number(`CRPIX${i + 1}`) ?? 1)) * (header.number(`CDELT${i + 1}`) ?? 1);
    if (name === "STOKES" && value !== 1) {
      notes.push(
        `The first plane of the STOKES axis is not total intensity (its value is ${value}): total intensity is what the causes are compared with.`,
      );
    }
    if (length === 1) return;
    notes.push(
      `Of the ${length} planes of axis ${i + 1}${name === "" ? "" : ` (${name})`} the first is looked at.`,
    );
    const width = Math.abs(header.number(`CDELT${i + 1}`) ?? 0);
    if (!name.startsWith("FREQ") || !(width > 0 && value > 0)) return;
    range = { low: value - width / 2, high: value + width / 2 };
    notes.push(`That plane is of ${formatFrequency(value, 6)}, ${formatFrequency(width)} wide.`);
  });
  return { range, notes };
}

function windowNotes(size: readonly [number, number], x: Window, y: Window): string[] {
  if (x.length === size[0] && y.length === size[1]) return [];
  return [
    `The image is ${size[0]} x ${size[1]} pixels: the ${x.length} x ${y.length} about its reference point are looked at, and sources outside them are not seen.`,
  ];
}

function projectionNotes({ projection }: SkyAxes): string[] {
  if (projection === "SIN") return [];
  return [`The ${projection} projection is read as SIN, which moves no pixel by more than a quarter of one.`];
}

function blankNotes(known: Uint8Array): string[] {
  const blank = known.reduce((sum, one) => sum + 1 - one, 0);
  return blank === 0 ? [] : [`${blank} pixels have no value and are left out.`];
}

function beamOf(header: Header): SkyImage["beam"] {
  const [major, minor] = [header.looseNumber("BMAJ"), header.looseNumber("BMIN")];
  if (major === undefined || minor === undefined || !(minor > 0 && major >= minor)) return null;
  const degree = Math.PI / 180;
  return { major: major * degree, minor: minor * degree, angle: (header.looseNumber("BPA") ?? 0) * degree };
}
