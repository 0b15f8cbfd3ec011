/**
 * What the columns of a table of visibilities are: which holds what, in which unit, and the facts that no column holds.
 * Plain data, in SI units; the YAML form is in `map-file.ts` and `map-text.ts`.
 */
import type { Polarization, PositionFrame } from "../dataset.ts";

/** The axes of a row's samples that a column or the elements of list columns may run along. */
export const AXES = ["subband", "channel", "polarization"] as const;
export type Axis = (typeof AXES)[number];

/** What a column may be. */
export const ROLES = [
  "time",
  "antenna1",
  "antenna2",
  "u",
  "v",
  "w",
  "subband",
  "channel",
  "frequency",
  "polarization",
  "field",
  "setup",
  "subarray",
  "integration",
  "real",
  "imag",
  "amplitude",
  "phase",
  "weight",
  "sigma",
  "flag",
] as const;
export type Role = (typeof ROLES)[number];

/** Columns that hold one value a sample: a list a row where the samples of a row are in lists. */
export const SAMPLE_ROLES: readonly Role[] = [
  "real",
  "imag",
  "amplitude",
  "phase",
  "weight",
  "sigma",
  "flag",
];

/** One column in a role. */
export interface ColumnUse {
  /** as the table spells it; hostile text */
  readonly column: string;
  /** one of the role's units (`units.ts`) */
  readonly unit?: string | undefined;
  /** MJD of 0 where the unit is that of a time since then, days */
  readonly since?: number | undefined;
  /** number of the first sub-band or channel; default: the lowest met, 0 or 1 */
  readonly from?: number | undefined;
  /** the numbers were single precision before they were printed */
  readonly single?: boolean | undefined;
}

export type ColumnUses = Readonly<Partial<Record<Role, ColumnUse>>>;

export interface SetupConstant {
  readonly id: number;
  /** (subbands) of (channels), Hz */
  readonly frequencies: readonly (readonly number[])[];
  /** Hz; one for all sub-bands, or one each; undefined: the spacing of the channels */
  readonly channelWidths: readonly number[] | undefined;
}

export interface FieldConstant {
  readonly id: number;
  readonly name: string;
  /** radians; NaN unknown */
  readonly rightAscension: number;
  readonly declination: number;
  readonly equinox: number;
}

export interface AntennaConstant {
  readonly number: number;
  readonly name: string;
  /** metres */
  readonly position: readonly [number, number, number] | null;
  readonly diameter: number | null;
}

/** What no column holds. */
export interface Constants {
  readonly array?: string | undefined;
  /** of the amplitudes */
  readonly unit?: string | undefined;
  readonly polarizations?: readonly Polarization[] | undefined;
  readonly setups?: readonly SetupConstant[] | undefined;
  /** width of channels whose frequencies are in a column, Hz */
  readonly channelWidth?: number | undefined;
  /** frequency that u, v, w in wavelengths are of, Hz */
  readonly referenceFrequency?: number | undefined;
  /** seconds */
  readonly integration?: number | undefined;
  readonly fields?: readonly FieldConstant[] | undefined;
  readonly antennas?: readonly AntennaConstant[] | undefined;
  /** a CSV file of antennas, its path resolved */
  readonly antennaFile?: string | undefined;
  readonly diameter?: number | undefined;
  readonly frame?: PositionFrame | undefined;
  /** MJD at 0h */
  readonly referenceDay?: number | undefined;
  /** degrees, Greenwich at 0h of the reference day */
  readonly siderealTime?: number | undefined;
  readonly degreesPerDay?: number | undefined;
  /** seconds */
  readonly ut1MinusUtc?: number | undefined;
  /** observer, date and the like, for `describe` */
  readonly header?: Readonly<Record<string, string>> | undefined;
}

export interface ColumnMap {
  readonly uses: ColumnUses;
  /** the axes along the elements of list columns, the slowest first; empty: one row a sample */
  readonly lists: readonly Axis[];
  readonly constants: Constants;
}
