/**
 * One dataset as every later stage sees it, whatever format it came from: small tables up front and
 * visibilities in blocks of typed arrays, in the order of the file.
 */

import type { DatasetRecipe } from "./recipe.ts";

/** Stokes-axis products by their FITS names (FITS Standard 4.0, table 29). */
export const POLARIZATIONS = ["I", "Q", "U", "V", "RR", "LL", "RL", "LR", "XX", "YY", "XY", "YX"] as const;
export type Polarization = (typeof POLARIZATIONS)[number];

/** How the positions in the antenna table are to be read. */
export type PositionFrame =
  /** x to Greenwich, y 90 deg east, z north, from the Earth's centre */
  | "geocentric"
  /** x to the local meridian on the equator, y east, z north; the longitude may be unknown */
  | "local"
  | "unknown";

export interface Antenna {
  /** as in the dataset's BASELINE codes */
  readonly number: number;
  /** hostile text: escape at the edge */
  readonly name: string;
  /** metres in `ArrayInfo.frame`; null where the file has none */
  readonly position: readonly [number, number, number] | null;
  /** metres; null where the file has none */
  readonly diameter: number | null;
}

export interface ArrayInfo {
  /** hostile text */
  readonly name: string;
  readonly frame: PositionFrame;
  /** in the order of the antenna table; without a table, one for every number met in the data */
  readonly antennas: readonly Antenna[];
  /** false where the file has no antenna table and names are made from numbers */
  readonly fromTable: boolean;
  /** Greenwich sidereal time at 0h of the reference date, degrees; null where the file has none */
  readonly siderealTimeAtReference: number | null;
  /** degrees of sidereal time a day of time; 360.9856... */
  readonly degreesPerDay: number;
  /** MJD of 0h of the reference date; null where the file has none */
  readonly referenceDay: number | null;
  /** UT1 - UTC, seconds */
  readonly ut1MinusUtc: number;
  /** polar motion and the like are below every tolerance here and are not kept */
  readonly timeSystem: string;
}

export interface Field {
  /** the id the rows use (the SU table's "ID. NO."), or 1 in single-field files */
  readonly id: number;
  /** hostile text */
  readonly name: string;
  /** phase centre, radians, at `equinox`; NaN where the file has none */
  readonly rightAscension: number;
  readonly declination: number;
  /** 1950 (B1950) or 2000 (J2000) or another year; NaN unknown */
  readonly equinox: number;
}

/** One frequency setup (FRQSEL): the same shape in every setup of a dataset. */
export interface Setup {
  readonly id: number;
  /** (subbands x channels) centre of each channel, Hz, channel fastest */
  readonly frequencies: Float64Array;
  /** (subbands) channel width, Hz, positive */
  readonly channelWidths: Float64Array;
}

/** Something noticed while reading that does not stop it: said once in the reports. */
export interface Note {
  readonly text: string;
  /** "fault": values that the format allows and science does not; "note": a quirk worth saying */
  readonly kind: "note" | "fault";
  /** a short stable word for rules and tests, such as "missing-antenna-table" */
  readonly code: string;
}

/** Sizes of the sample axes of a row. */
export interface Shape {
  readonly subbands: number;
  readonly channels: number;
  readonly polarizations: number;
}

export interface Dataset {
  /** file name without folder and known suffixes; hostile text */
  readonly name: string;
  readonly files: readonly string[];
  /** total size in bytes on disk */
  readonly bytes: number;
  readonly format: "random-groups" | "fits-idi" | "columnar" | "simulated";
  /** telescope, observer's date and the like, for `describe`; hostile text */
  readonly header: Readonly<Record<string, string>>;
  readonly array: ArrayInfo;
  readonly fields: readonly Field[];
  readonly setups: readonly Setup[];
  readonly polarizations: readonly Polarization[];
  readonly shape: Shape;
  /** unit of the amplitudes: "Jy" when the file says calibrated, else "uncalibrated" or what it says */
  readonly unit: string;
  /** false where the file carries no weights and every weight is 1 */
  readonly hasWeights: boolean;
  readonly rows: number;
  readonly notes: readonly Note[];
  /** how to open it again elsewhere; absent where it is in memory alone */
  readonly recipe?: DatasetRecipe;
  /**
   * Rows in file order. The yielded block and its arrays are buffers of this call: the caller may overwrite them, and
   * they are valid until the next block is asked for.
   * @throws InputError at the byte or group where the file is malformed
   */
  blocks(request: BlockRequest): AsyncIterable<SampleBlock>;
}

export interface BlockRequest {
  /** what to convert besides the row columns; arrays not asked for are empty */
  readonly want: "rows" | "weights" | "samples";
  /** rows to read, [first, last) from 0; default all */
  readonly rows?: readonly [number, number];
  /** most rows in a block; the reader may give fewer, and lowers it to keep a block under about 16 MB */
  readonly blockRows?: number;
}

/**
 * A run of rows: one baseline at one integration each. Sample arrays are (rows x subbands x channels x
 * polarizations), polarization fastest. Arrays may be longer than `rows` needs.
 */
export interface SampleBlock {
  /** index in the dataset of this block's first row, from 0 */
  firstRow: number;
  rows: number;
  /** MJD (UTC, days) of the centre of the integration; NaN where the file's is not finite */
  readonly time: Float64Array;
  /** light travel, seconds; position(antenna1) - position(antenna2) by the usual convention */
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly w: Float64Array;
  readonly antenna1: Int32Array;
  readonly antenna2: Int32Array;
  /** sub-array number, from 1 */
  readonly subarray: Int32Array;
  /** Field.id */
  readonly field: Int32Array;
  /** index into Dataset.setups */
  readonly setup: Int32Array;
  /** seconds; NaN where the file does not say */
  readonly integration: Float32Array;
  readonly real: Float32Array;
  readonly imag: Float32Array;
  /** > 0 usable; <= 0 flagged; not finite: bad */
  readonly weight: Float32Array;
}

/** Index of a sample in a block's arrays. */
export function sampleIndex(
  shape: Shape,
  row: number,
  subband: number,
  channel: number,
  polarization: number,
): number {
  return ((row * shape.subbands + subband) * shape.channels + channel) * shape.polarizations + polarization;
}
