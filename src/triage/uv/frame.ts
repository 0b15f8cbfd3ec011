/**
 * How the dataset's u, v, w are seen from the image: turned to its reference point, and as cycles a pixel.
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., Eq. 3.7, 4.1
 */
import type { Field } from "../../dataset/dataset.ts";
import { equinoxDay, precess } from "../../geometry/precession.ts";
import type { SkyImage } from "../image/sky-image.ts";

export interface ImageFrame {
  /** (3 x 3) row by row: u, v, w of the dataset to those of the image's reference point */
  readonly turn: Float64Array;
  /** true where the reference point is the phase centre: nothing is turned */
  readonly same: boolean;
  /** radians from the phase centre to the reference point */
  readonly offset: number;
  /** direction cosines a pixel (SkyAxes.matrix) */
  readonly matrix: SkyImage["sky"]["matrix"];
  /** direction cosines of the window's middle pixel, (width >> 1, height >> 1) */
  readonly middle: readonly [l: number, m: number];
  /** radians: square root of the area of a pixel */
  readonly cell: number;
  readonly declination: number;
}

/** Below this, radians (0.2 mas), places are one: a header has no more digits. */
const SAME_PLACE = 1e-9;

export function imageFrame(image: SkyImage, field: Field): ImageFrame {
  const { sky, corner, width, height } = image;
  const [a, b, c, d] = sky.matrix;
  const dx = corner[0] + (width >> 1) - sky.reference[0];
  const dy = corner[1] + (height >> 1) - sky.reference[1];
  const known = Number.isFinite(field.rightAscension + field.declination);
  const turn = known ? turnBetween(field, sky) : identity();
  // cos of the angle between the two w axes is the last element; its sine keeps the digits that the cosine loses.
  const offset = Math.asin(Math.min(1, Math.hypot(turn[6]!, turn[7]!)));
  return {
    turn,
    same: offset < SAME_PLACE && Math.abs(turn[1]!) < SAME_PLACE,
    offset: known ? offset : Number.NaN,
    matrix: sky.matrix,
    middle: [a * dx + b * dy, c * dx + d * dy],
    cell: Math.sqrt(Math.abs(a * d - b * c)),
    declination: sky.declination,
  };
}

function identity(): Float64Array {
  return Float64Array.of(1, 0, 0, 0, 1, 0, 0, 0, 1);
}

/** Axes east, north and towards a place, as rows, in the equator and equinox given. */
function axesAt(rightAscension: number, declination: number): number[] {
  const [sa, ca, sd, cd] = [
    Math.sin(rightAscension),
    Math.cos(rightAscension),
    Math.sin(declination),
    Math.cos(declination),
  ];
  return [-sa, ca, 0, -sd * ca, -sd * sa, cd, cd * ca, cd * sa, sd];
}

function turnBetween(field: Field, sky: SkyImage["sky"]): Float64Array {
  const from = axesAt(field.rightAscension, field.declination);
  const differs =
    Number.isFinite(field.equinox + sky.equinox) && Math.abs(field.equinox - sky.equinox) > 0.01;
  const rows = [0, 1, 2].map((row) => {
    const axis = axesAt(sky.rightAscension, sky.declination).slice(3 * row, 3 * row + 3);
    return differs ? precessed(axis, equinoxDay(sky.equinox), equinoxDay(field.equinox)) : axis;
  });
  const turn = new Float64Array(9);
  for (let i = 0; i < 3; i++) {
    for (let j = 0; j < 3; j++) {
      for (let k = 0; k < 3; k++) turn[3 * i + j]! += rows[i]![k]! * from[3 * j + k]!;
    }
  }
  return turn;
}

/** A direction carried from one equinox to the other. */
function precessed(axis: readonly number[], fromDay: number, toDay: number): number[] {
  const [x, y, z] = axis as [number, number, number];
  const place = precess(Math.atan2(y, x), Math.atan2(z, Math.hypot(x, y)), fromDay, toDay);
  return axesAt(place.rightAscension, place.declination).slice(6);
}

/** Cycles a pixel of (u, v) in wavelengths, along x and along y. */
export function cyclesX({ matrix }: ImageFrame, u: number, v: number): number {
  return u * matrix[0] + v * matrix[2];
}

export function cyclesY({ matrix }: ImageFrame, u: number, v: number): number {
  return u * matrix[1] + v * matrix[3];
}

/** Pixels from the middle one to direction cosines. */
export function skyOffset(frame: ImageFrame, x: number, y: number): [l: number, m: number] {
  const [a, b, c, d] = frame.matrix;
  return [frame.middle[0] + a * x + b * y, frame.middle[1] + c * x + d * y];
}

/** Direction cosines to pixels from the middle one. */
export function pixelOffset(frame: ImageFrame, l: number, m: number): [x: number, y: number] {
  const [a, b, c, d] = frame.matrix;
  const determinant = a * d - b * c;
  const [p, q] = [l - frame.middle[0], m - frame.middle[1]];
  return [(d * p - b * q) / determinant, (a * q - c * p) / determinant];
}
