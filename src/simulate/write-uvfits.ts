/**
 * A dataset as a random-groups FITS file, written row by row: what a correlator's export looks like, small tables after
 * the groups. Conventions of the visibility data on top of FITS as in Greisen 2016 (recalled).
 */
import type { Dataset, SampleBlock } from "../dataset/dataset.ts";
import {
  type AxisToWrite,
  bigEndian,
  type CardToWrite,
  card,
  FitsFileWriter,
  type GroupsToWrite,
  groupItems,
  groupsHeader,
  type ParameterToWrite,
  real,
} from "../dataset/fits/write.ts";
import { dateFromMjd, MJD_EPOCH_JD } from "../util/dates.ts";
import { stokesAxis, unfit } from "./stokes-axis.ts";
import { antennaTable, frequencyTable, sourceTable } from "./uvfits-tables.ts";

export interface UvfitsOptions {
  /** element type of groups; default -32, single precision */
  readonly bitpix?: -32 | -64;
  /** false: no IF axis, for one sub-band; default true */
  readonly subbandAxis?: boolean;
  /**
   * how a row names its antennas: 256 a1 + a2, 65536 + 2048 a1 + a2, or parameters of their own; default the first
   * that the antenna numbers fit
   */
  readonly baseline?: "256" | "2048" | "antennas";
  /** u, v, w as seconds, or as wavelengths at the reference frequency with PSCAL its inverse; default seconds */
  readonly uvw?: "seconds" | "wavelengths";
  /** an SU table and SOURCE for one field too; default only where there are several */
  readonly sources?: boolean;
  /** lines of HISTORY */
  readonly history?: readonly string[];
  /** default: refuse when the file is there */
  readonly overwrite?: boolean;
  /** called as rows are written */
  readonly onRows?: (done: number, of: number) => void;
}

const DEGREES = 180 / Math.PI;

/**
 * Write `dataset` to `path`, beside it first and renamed when it is whole.
 *
 * @throws InputError when the file is there already, or the dataset does not fit the format
 */
export async function writeUvfits(
  dataset: Dataset,
  path: string,
  options: UvfitsOptions = {},
): Promise<void> {
  const layout = layoutOf(dataset, options);
  const header = groupsHeader(layout.groups);
  const writer = await FitsFileWriter.create(path, { overwrite: options.overwrite ?? false });
  try {
    await writer.blocks(header);
    const items = groupItems(layout.groups);
    for await (const block of dataset.blocks({ want: "samples", blockRows: rowsAtOnce(items) })) {
      await writer.data(groupBytes(block, layout, items));
      options.onRows?.(block.firstRow + block.rows, dataset.rows);
    }
    await writer.blocks(antennaTable(dataset));
    await writer.blocks(frequencyTable(dataset));
    if (layout.sources) await writer.blocks(sourceTable(dataset));
    await writer.commit();
  } catch (error) {
    await writer.abort();
    throw error;
  }
}

/** Values of one group's parameters, in order, into `out` from `at`. */
type PutParameters = (block: SampleBlock, row: number, out: Float32Array | Float64Array, at: number) => void;

interface Layout {
  readonly groups: GroupsToWrite;
  readonly sources: boolean;
  readonly rowSamples: number;
  readonly put: PutParameters;
}

const MEGABYTES_AT_ONCE = 4;

function rowsAtOnce(items: number): number {
  return Math.max(1, Math.floor((MEGABYTES_AT_ONCE * 1e6) / (4 * items)));
}

function layoutOf(dataset: Dataset, options: UvfitsOptions): Layout {
  const { shape, setups, array } = dataset;
  const setup = setups[0]!;
  if (setups.length > 1) throw unfit(dataset, `${setups.length} frequency setups`, "one");
  const withSubbands = options.subbandAxis ?? true;
  if (!withSubbands && shape.subbands > 1) {
    throw unfit(dataset, `no sub-band axis for ${shape.subbands} sub-bands`, "one sub-band");
  }
  const sources = options.sources ?? dataset.fields.length > 1;
  if (!sources && dataset.fields.length > 1)
    throw unfit(dataset, "no source table for several fields", "one");
  const reference = setup.frequencies[0]!;
  const day = array.referenceDay ?? 0;
  const numbers = array.antennas.map(({ number }) => number);
  const baseline = options.baseline ?? (Math.max(...numbers) > 255 ? "2048" : "256");
  if (baseline !== "antennas" && Math.max(...numbers) > (baseline === "256" ? 255 : 2047)) {
    throw unfit(dataset, `antenna number ${Math.max(...numbers)} in a ${baseline} code`, "a wider code");
  }
  const uvwScale = options.uvw === "wavelengths" ? 1 / reference : 1;
  return {
    sources,
    rowSamples: shape.subbands * shape.channels * shape.polarizations,
    put: parametersOf(day, baseline, uvwScale, sources),
    groups: {
      bitpix: options.bitpix ?? -32,
      groups: dataset.rows,
      axes: axesOf(dataset, withSubbands, sources),
      parameters: parameterCards(day, baseline, uvwScale, sources),
      cards: cardsOf(dataset, options),
    },
  };
}

function axesOf(dataset: Dataset, withSubbands: boolean, sources: boolean): AxisToWrite[] {
  const { shape, setups, fields } = dataset;
  const { frequencies } = setups[0]!;
  const stokes = stokesAxis(dataset);
  const channelStep = shape.channels > 1 ? frequencies[1]! - frequencies[0]! : setups[0]!.channelWidths[0]!;
  const centre = sources ? undefined : fields[0];
  return [
    { type: "COMPLEX", length: 3, value: 1, step: 1 },
    { type: "STOKES", length: shape.polarizations, ...stokes },
    { type: "FREQ", length: shape.channels, value: frequencies[0]!, step: channelStep },
    ...(withSubbands ? [{ type: "IF", length: shape.subbands, value: 1, step: 1 }] : []),
    { type: "RA", length: 1, value: (centre?.rightAscension ?? 0) * DEGREES, step: 1 },
    { type: "DEC", length: 1, value: (centre?.declination ?? 0) * DEGREES, step: 1 },
  ];
}

function parameterCards(
  day: number,
  baseline: NonNullable<UvfitsOptions["baseline"]>,
  uvwScale: number,
  sources: boolean,
): ParameterToWrite[] {
  const names = baseline === "antennas" ? ["ANTENNA1", "ANTENNA2", "SUBARRAY"] : ["BASELINE"];
  return [
    ...["UU---SIN", "VV---SIN", "WW---SIN"].map((name) => ({ name, scale: uvwScale })),
    // A Julian date in two single-precision parts resolves microseconds; one alone a quarter of a day.
    { name: "DATE", zero: day + MJD_EPOCH_JD },
    { name: "DATE" },
    ...names.map((name) => ({ name })),
    { name: "INTTIM" },
    ...(sources ? [{ name: "SOURCE" }] : []),
  ];
}

function parametersOf(
  day: number,
  baseline: NonNullable<UvfitsOptions["baseline"]>,
  uvwScale: number,
  sources: boolean,
): PutParameters {
  return (block, row, out, at) => {
    let i = at;
    out[i++] = block.u[row]! / uvwScale;
    out[i++] = block.v[row]! / uvwScale;
    out[i++] = block.w[row]! / uvwScale;
    const fraction = block.time[row]! - day;
    const coarse = Math.fround(fraction);
    out[i++] = coarse;
    out[i++] = fraction - coarse;
    const a1 = block.antenna1[row]!;
    const a2 = block.antenna2[row]!;
    const subarray = block.subarray[row]!;
    if (baseline === "antennas") {
      out[i++] = a1;
      out[i++] = a2;
      out[i++] = subarray;
    } else {
      const code = baseline === "256" ? 256 * a1 + a2 : 65536 + 2048 * a1 + a2;
      out[i++] = code + 0.01 * (subarray - 1);
    }
    out[i++] = block.integration[row]!;
    if (sources) out[i] = block.field[row]!;
  };
}

function cardsOf(dataset: Dataset, options: UvfitsOptions): CardToWrite[] {
  const { fields, array, unit } = dataset;
  const { header } = dataset;
  return [
    card("OBJECT", fields.length === 1 ? fields[0]!.name : "MULTI"),
    card("TELESCOP", array.name),
    card("INSTRUME", array.name),
    card("DATE-OBS", header["DATE-OBS"] ?? dateFromMjd(array.referenceDay ?? 0)),
    card("BUNIT", unit === "Jy" ? "JY" : "UNCALIB"),
    card("EQUINOX", real(fields[0]!.equinox)),
    card("ORIGIN", "visvet simulate"),
    ...(options.history ?? []).map((comment) => ({ keyword: "HISTORY", comment })),
  ];
}

function groupBytes(block: SampleBlock, layout: Layout, items: number): Uint8Array {
  const { groups, rowSamples, put } = layout;
  const values =
    groups.bitpix === -64 ? new Float64Array(block.rows * items) : new Float32Array(block.rows * items);
  const { real: re, imag: im, weight } = block;
  const parameters = groups.parameters.length;
  for (let row = 0; row < block.rows; row++) {
    put(block, row, values, row * items);
    let out = row * items + parameters;
    const first = row * rowSamples;
    for (let i = first; i < first + rowSamples; i++) {
      values[out] = re[i]!;
      values[out + 1] = im[i]!;
      values[out + 2] = weight[i]!;
      out += 3;
    }
  }
  return bigEndian(values);
}
