/** A dataset as columns: which there are, their cells block by block, and the map that says what they hold. */

import type { Axis, ColumnMap, ColumnUse, Constants, Role } from "../dataset/columnar/column-map.ts";
import type { Dataset, SampleBlock, Shape } from "../dataset/dataset.ts";

/** sample: one row a sample; row: one row a baseline and time, its samples in lists */
export type TableLayout = "sample" | "row";

export type CellType = "double" | "single" | "integer" | "text" | "flag";

export interface WrittenColumn {
  readonly role: Role;
  readonly name: string;
  readonly type: CellType;
  /** elements of the list in every cell; 0: no list */
  readonly listLength: number;
  /**
   * Cells of a block: one a row of the dataset where `perRow`, to be repeated for each sample in the sample layout;
   * else one a sample, in the order of the block.
   */
  readonly perRow: boolean;
  readonly cells: (block: SampleBlock) => ArrayLike<number | string>;
}

export interface WrittenTable {
  readonly columns: readonly WrittenColumn[];
  readonly map: ColumnMap;
  readonly layout: TableLayout;
  /** table rows of one row of the dataset */
  readonly repeat: number;
}

/** What the rows hold that decides which columns are needed. */
export interface RowFacts {
  /** the one integration time, seconds; NaN when rows differ or none is known */
  readonly integration: number;
  readonly subarrays: boolean;
  readonly fields: boolean;
  /** every finite u, v, w is a single-precision number */
  readonly singleUvw: boolean;
}

/** One pass over the rows. */
export async function rowFacts(dataset: Dataset): Promise<RowFacts> {
  let integration: number | undefined;
  let subarrays = false;
  let singleUvw = true;
  const only = dataset.fields.length === 1 ? dataset.fields[0]!.id : undefined;
  let fields = only === undefined;
  for await (const block of dataset.blocks({ want: "rows" })) {
    for (let row = 0; row < block.rows; row++) {
      const seconds = block.integration[row]!;
      integration ??= seconds;
      if (seconds !== integration) integration = Number.NaN;
      if (block.subarray[row] !== 1) subarrays = true;
      if (block.field[row] !== only) fields = true;
      for (const value of [block.u[row]!, block.v[row]!, block.w[row]!]) {
        if (Math.fround(value) !== value && !Number.isNaN(value)) singleUvw = false;
      }
    }
  }
  return { integration: integration ?? Number.NaN, subarrays, fields, singleUvw };
}

/** @param units of time and u, v, w where the format prefers others than MJD and seconds */
export function tableOf(
  dataset: Dataset,
  facts: RowFacts,
  layout: TableLayout,
  units: { readonly time: Omit<ColumnUse, "column">; readonly uvw: Omit<ColumnUse, "column"> },
): WrittenTable {
  const { shape } = dataset;
  const samples = shape.subbands * shape.channels * shape.polarizations;
  const inRows = layout === "row";
  const columns = [
    ...rowColumns(dataset, facts),
    ...(inRows ? [] : axisColumns(dataset)),
    ...sampleColumns(dataset, inRows ? samples : 0),
  ];
  const uses: Partial<Record<Role, ColumnUse>> = {};
  for (const { role, name } of columns) uses[role] = { column: name, ...unitOf(role, units) };
  return {
    columns,
    map: {
      uses,
      lists: inRows ? ["subband", "channel", "polarization"] : [],
      constants: constantsOf(dataset, facts),
    },
    layout,
    repeat: inRows ? 1 : samples,
  };
}

function unitOf(role: Role, { time, uvw }: Parameters<typeof tableOf>[3]): Omit<ColumnUse, "column"> {
  switch (role) {
    case "time":
      return time;
    case "u":
    case "v":
    case "w":
      return uvw;
    case "integration":
      return { unit: "s" };
    case "subband":
    case "channel":
      return { from: 0 };
    default:
      return {};
  }
}

function rowColumns({ setups }: Dataset, facts: RowFacts): WrittenColumn[] {
  const column = (
    role: Role,
    type: CellType,
    cells: (block: SampleBlock) => ArrayLike<number>,
  ): WrittenColumn => ({ role, name: role, type, listLength: 0, perRow: true, cells });
  return [
    column("time", "double", (block) => block.time),
    column("antenna1", "integer", (block) => block.antenna1),
    column("antenna2", "integer", (block) => block.antenna2),
    column("u", "double", (block) => block.u),
    column("v", "double", (block) => block.v),
    column("w", "double", (block) => block.w),
    ...(facts.subarrays ? [column("subarray", "integer", (block) => block.subarray)] : []),
    ...(facts.fields ? [column("field", "integer", (block) => block.field)] : []),
    ...(setups.length > 1
      ? [column("setup", "integer", (block) => block.setup.map((index) => setups[index]!.id))]
      : []),
    ...(Number.isNaN(facts.integration)
      ? [column("integration", "single", (block) => block.integration)]
      : []),
  ];
}

function axisColumns({ shape, polarizations }: Dataset): WrittenColumn[] {
  const { subbands, channels } = shape;
  const of = (axis: Axis, type: CellType, cell: (sample: number) => number | string): WrittenColumn => {
    const period = subbands * channels * shape.polarizations;
    const once = Array.from({ length: period }, (_, sample) => cell(sample));
    return {
      role: axis,
      name: axis,
      type,
      listLength: 0,
      perRow: false,
      cells: (block) => Array.from({ length: block.rows * period }, (_, i) => once[i % period]!),
    };
  };
  const inSubband = channels * shape.polarizations;
  return [
    ...(subbands > 1 ? [of("subband", "integer", (sample) => Math.floor(sample / inSubband))] : []),
    ...(channels > 1
      ? [of("channel", "integer", (sample) => Math.floor(sample / shape.polarizations) % channels)]
      : []),
    of("polarization", "text", (sample) => polarizations[sample % shape.polarizations]!),
  ];
}

function sampleColumns(dataset: Dataset, listLength: number): WrittenColumn[] {
  const column = (
    role: Role,
    type: CellType,
    cells: (block: SampleBlock, samples: number) => ArrayLike<number>,
  ): WrittenColumn => ({
    role,
    name: role,
    type,
    listLength,
    perRow: false,
    cells: (block) => cells(block, block.rows * samplesOf(dataset.shape)),
  });
  return [
    column("real", "single", (block, samples) => block.real.subarray(0, samples)),
    column("imag", "single", (block, samples) => block.imag.subarray(0, samples)),
    dataset.hasWeights
      ? column("weight", "single", (block, samples) => block.weight.subarray(0, samples))
      : column("flag", "flag", (block, samples) =>
          Uint8Array.from(block.weight.subarray(0, samples), (weight) => (weight > 0 ? 0 : 1)),
        ),
  ];
}

export function samplesOf({ subbands, channels, polarizations }: Shape): number {
  return subbands * channels * polarizations;
}

function constantsOf(dataset: Dataset, facts: RowFacts): Constants {
  const { array, setups, shape, fields, unit, header } = dataset;
  return {
    array: array.name === "" ? undefined : array.name,
    unit: unit === "uncalibrated" ? undefined : unit,
    polarizations: dataset.polarizations,
    setups: setups.map(({ id, frequencies, channelWidths }) => ({
      id,
      frequencies: Array.from({ length: shape.subbands }, (_, subband) => [
        ...frequencies.subarray(subband * shape.channels, (subband + 1) * shape.channels),
      ]),
      channelWidths: channelWidths.some((width) => Number.isNaN(width))
        ? undefined
        : channelWidths.every((width) => width === channelWidths[0])
          ? [channelWidths[0]!]
          : [...channelWidths],
    })),
    integration: Number.isNaN(facts.integration) ? undefined : facts.integration,
    fields,
    antennas: array.fromTable ? array.antennas : undefined,
    frame: array.frame === "unknown" ? undefined : array.frame,
    referenceDay: array.referenceDay ?? undefined,
    siderealTime: array.siderealTimeAtReference ?? undefined,
    degreesPerDay: array.degreesPerDay,
    ut1MinusUtc: array.ut1MinusUtc === 0 ? undefined : array.ut1MinusUtc,
    header: Object.keys(header).length === 0 ? undefined : header,
  };
}
