/**
 * Which parameters of a group give which column of a row. A quantity may be spread over several parameters of one
 * name: they add (FITS Standard 4.0, section 6.1.2). Names by the visibility convention (Greisen 2016, recalled).
 */
import { MJD_EPOCH_JD } from "../../util/dates.ts";
import { dividedBy, isCoordinate, isInWavelengths, type RowColumns, type Sum } from "../fits-rows/columns.ts";
import type { GroupLayout, GroupParameter } from "./layout.ts";

export interface GroupColumns extends RowColumns {
  /** of two-element COMPLEX arrays: one weight and one scale for the group */
  readonly weight: Sum | undefined;
  readonly scale: Sum | undefined;
}

/**
 * @param referenceFrequency Hz, for u, v, w that are stored in wavelengths (`UU-L`)
 * @throws InputError when u, v, the baseline or the time is missing
 */
export function rowColumns(layout: GroupLayout, referenceFrequency: number): GroupColumns {
  const { header } = layout.hdu;
  const found = layout.parameters.map(({ name }) => name || "unnamed").join(", ");
  const missing = (what: string) => header.error(`no parameter ${what} (found ${found})`, "PCOUNT");
  const u = coordinate(layout, "UU", referenceFrequency);
  const v = coordinate(layout, "VV", referenceFrequency);
  if (u === undefined || v === undefined) throw missing(u === undefined ? "UU" : "VV");
  const time = sumOf(layout, named(layout, "DATE"), -MJD_EPOCH_JD);
  if (time === undefined) throw missing("DATE");
  const column = (name: string) => sumOf(layout, named(layout, name));
  const baseline = column("BASELINE");
  const antenna1 = column("ANTENNA1");
  const antenna2 = column("ANTENNA2");
  if (baseline === undefined && (antenna1 === undefined || antenna2 === undefined)) {
    throw missing("BASELINE, nor ANTENNA1 and ANTENNA2");
  }
  return {
    u,
    v,
    w: coordinate(layout, "WW", referenceFrequency),
    time,
    baseline,
    antenna1,
    antenna2,
    subarray: column("SUBARRAY"),
    integration: column("INTTIM"),
    source: column("SOURCE"),
    setup: column("FREQSEL"),
    weight: column("WEIGHT"),
    scale: column("SCALE"),
  };
}

function named(layout: GroupLayout, name: string): GroupParameter[] {
  return layout.parameters.filter((parameter) => parameter.name === name);
}

function coordinate(layout: GroupLayout, axis: string, referenceFrequency: number): Sum | undefined {
  const first = layout.parameters.find(({ name }) => isCoordinate(name, axis));
  if (first === undefined) return undefined;
  const sum = sumOf(layout, named(layout, first.name))!;
  if (!isInWavelengths(first.name)) return sum;
  if (!(referenceFrequency > 0)) {
    throw layout.hdu.header.error(
      `${first.name} is in wavelengths, and there is no frequency to refer them to`,
      `PTYPE${first.index + 1}`,
    );
  }
  return dividedBy(sum, referenceFrequency);
}

function sumOf(layout: GroupLayout, parameters: readonly GroupParameter[], start = 0): Sum | undefined {
  if (parameters.length === 0) return undefined;
  const { itemBytes, bitpix } = layout;
  return {
    constant: parameters.reduce((sum, { zero }) => sum + zero, start),
    terms: parameters.map(({ index, scale }) => ({ offset: index * itemBytes, scale, bitpix })),
  };
}
