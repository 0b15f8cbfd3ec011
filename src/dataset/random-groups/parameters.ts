/**
 * Which parameters of a group give which column of a row. A quantity may be spread over several parameters of one
 * name: they add (FITS Standard 4.0, section 6.1.2). Names by the visibility convention (Greisen 2016, recalled).
 */
import { MJD_EPOCH_JD } from "../../util/dates.ts";
import type { GroupLayout, GroupParameter } from "./layout.ts";

/** value = constant + sum over terms of scale x stored */
export interface Sum {
  readonly constant: number;
  readonly terms: readonly Term[];
}

export interface Term {
  /** byte of the item in the group */
  readonly offset: number;
  readonly scale: number;
}

export interface RowColumns {
  /** light travel, seconds */
  readonly u: Sum;
  readonly v: Sum;
  readonly w: Sum | undefined;
  /** MJD in the file's time system, days */
  readonly time: Sum;
  readonly baseline: Sum | undefined;
  readonly antenna1: Sum | undefined;
  readonly antenna2: Sum | undefined;
  readonly subarray: Sum | undefined;
  readonly integration: Sum | undefined;
  readonly source: Sum | undefined;
  readonly setup: Sum | undefined;
  /** of two-element COMPLEX arrays: one weight and one scale for the group */
  readonly weight: Sum | undefined;
  readonly scale: Sum | undefined;
}

/**
 * @param referenceFrequency Hz, for u, v, w that are stored in wavelengths (`UU-L`)
 * @throws InputError when u, v, the baseline or the time is missing
 */
export function rowColumns(layout: GroupLayout, referenceFrequency: number): RowColumns {
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

/** `UU`, `UU--`, `UU---SIN` are seconds; `UU-L`, `UU-L-SIN` wavelengths at the reference frequency. */
function coordinate(layout: GroupLayout, axis: string, referenceFrequency: number): Sum | undefined {
  const first = layout.parameters.find(({ name }) => name.split("-")[0] === axis);
  if (first === undefined) return undefined;
  const sum = sumOf(layout, named(layout, first.name))!;
  if (first.name.split("-")[1] !== "L") return sum;
  if (!(referenceFrequency > 0)) {
    throw layout.hdu.header.error(
      `${first.name} is in wavelengths, and there is no frequency to refer them to`,
      `PTYPE${first.index + 1}`,
    );
  }
  return {
    constant: sum.constant / referenceFrequency,
    terms: sum.terms.map(({ offset, scale }) => ({ offset, scale: scale / referenceFrequency })),
  };
}

function sumOf(layout: GroupLayout, parameters: readonly GroupParameter[], start = 0): Sum | undefined {
  if (parameters.length === 0) return undefined;
  return {
    constant: parameters.reduce((sum, { zero }) => sum + zero, start),
    terms: parameters.map(({ index, scale }) => ({ offset: index * layout.itemBytes, scale })),
  };
}
