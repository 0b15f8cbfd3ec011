/**
 * A dataset as a FITS-IDI file, written row by row: the small tables first, then one UV_DATA table. Every value goes
 * through unchanged: visibilities and weights in the single precision they have, times and u, v, w in double.
 */
import type { Dataset } from "../dataset/dataset.ts";
import {
  type CardToWrite,
  card,
  FitsFileWriter,
  headerBlocks,
  real,
  streamedTable,
} from "../dataset/fits/write.ts";
import {
  antennaTable,
  arrayGeometry,
  channelStep,
  degreesOf,
  frequencyTable,
  type Reference,
  sharedCards,
  sourceTable,
} from "../dataset/fits-idi/small-tables.ts";
import { dateFromMjd } from "../util/dates.ts";
import { requireEvenChannels } from "./even-channels.ts";
import { type UvRowLayout, uvRowBytes, uvRowLayout } from "./fits-idi-layout.ts";
import { type RowScan, scanRows } from "./fits-idi-scan.ts";
import { stokesAxis } from "./stokes-axis.ts";

export interface FitsIdiOptions {
  /** rows to write, [first, end) from 0, so that several files hold one dataset; default all */
  readonly rows?: readonly [number, number];
  /** lines of HISTORY */
  readonly history?: readonly string[];
  /** default: refuse when the file is there */
  readonly overwrite?: boolean;
  /** called as rows are written */
  readonly onRows?: (done: number, of: number) => void;
}

const BYTES_AT_ONCE = 4e6;

/**
 * Write `dataset` to `path`, beside it first and renamed when it is whole. Weights that are the same in all channels of
 * a product and sub-band go into a column of their own, others into the matrix; flags stay negative weights.
 *
 * @throws InputError when the file is there already, or the dataset does not fit the format
 */
export async function writeFitsIdi(
  dataset: Dataset,
  path: string,
  options: FitsIdiOptions = {},
): Promise<void> {
  const rows = options.rows ?? ([0, dataset.rows] as const);
  const scan = await scanRows(dataset, rows);
  for (const setup of dataset.setups) requireEvenChannels(dataset, setup);
  const reference = referenceOf(dataset, scan);
  const layout = uvRowLayout(dataset, scan, reference.day);
  const count = rows[1] - rows[0];
  const { header, rowBytes } = streamedTable({
    name: "UV_DATA",
    columns: layout.columns,
    rows: count,
    cards: dataCards(dataset, reference, layout),
  });
  const small = smallTables(dataset, reference, scan);
  const writer = await FitsFileWriter.create(path, { overwrite: options.overwrite ?? false });
  try {
    await writer.blocks(primaryHeader(dataset, scan, options.history ?? []));
    for (const table of small) await writer.blocks(table);
    await writer.blocks(header);
    const blockRows = Math.max(1, Math.floor(BYTES_AT_ONCE / rowBytes));
    for await (const block of dataset.blocks({ want: "samples", rows, blockRows })) {
      await writer.data(uvRowBytes(block, dataset, layout, rowBytes));
      options.onRows?.(block.firstRow + block.rows - rows[0], count);
    }
    await writer.commit();
  } catch (error) {
    await writer.abort();
    throw error;
  }
}

function referenceOf(dataset: Dataset, { firstTime }: RowScan): Reference {
  const firstDay = Number.isFinite(firstTime) ? Math.floor(firstTime) : 0;
  return { day: dataset.array.referenceDay ?? firstDay, products: dataset.polarizations };
}

function smallTables(
  dataset: Dataset,
  reference: Reference,
  { subarrays, firstTime, lastTime }: RowScan,
): Uint8Array[] {
  return [
    ...subarrays.map((subarray) => arrayGeometry(dataset, reference, subarray)),
    antennaTable(dataset, reference, subarrays, [firstTime, lastTime]),
    frequencyTable(dataset, reference),
    sourceTable(dataset, reference),
  ];
}

/** What the dataset's header says, by the words of a reader or by the keywords of a simulation. */
function observationCards({ header, array, fields }: Dataset, firstTime: number): CardToWrite[] {
  const said = (word: string, keyword: string) => header[word] ?? header[keyword];
  const observer = said("observer", "OBSERVER");
  const observed = said("observed", "DATE-OBS") ?? dateFromMjd(firstTime);
  return [
    card("OBJECT", said("object", "OBJECT") ?? (fields.length === 1 ? fields[0]!.name : "MULTI")),
    card("TELESCOP", said("telescope", "TELESCOP") ?? array.name),
    card("INSTRUME", said("instrument", "INSTRUME") ?? array.name),
    ...(observer === undefined ? [] : [card("OBSERVER", observer)]),
    ...(observed === "unknown" ? [] : [card("DATE-OBS", observed)]),
  ];
}

/** GROUPS = T without groups is the format's mark. */
function primaryHeader(dataset: Dataset, { firstTime }: RowScan, history: readonly string[]): Uint8Array {
  return headerBlocks([
    card("SIMPLE", true, "conforms to the FITS standard"),
    card("BITPIX", 8),
    card("NAXIS", 0, "no array: tables follow"),
    card("EXTEND", true),
    card("GROUPS", true),
    card("GCOUNT", 0),
    card("PCOUNT", 0),
    ...observationCards(dataset, firstTime),
    card("ORIGIN", dataset.header.origin ?? "visvet"),
    ...history.map((comment) => ({ keyword: "HISTORY", comment })),
  ]);
}

function dataCards(dataset: Dataset, reference: Reference, { columns, weights }: UvRowLayout): CardToWrite[] {
  const { shape, setups, fields } = dataset;
  const stokes = stokesAxis(dataset);
  const centre = fields.length === 1 ? fields[0]! : undefined;
  const degrees = (radians: number | undefined) =>
    radians === undefined || Number.isNaN(radians) ? 0 : degreesOf(radians);
  const equinoxes = new Set(fields.map(({ equinox }) => equinox));
  const [equinox] = equinoxes;
  const axes: readonly (readonly [type: string, length: number, value: number, step: number])[] = [
    ["COMPLEX", weights === "matrix" ? 3 : 2, 1, 1],
    ["STOKES", shape.polarizations, stokes.value, stokes.step],
    ["FREQ", shape.channels, setups[0]!.frequencies[0]!, channelStep(dataset)],
    ["BAND", shape.subbands, 1, 1],
    ["RA", 1, degrees(centre?.rightAscension), 1],
    ["DEC", 1, degrees(centre?.declination), 1],
  ];
  return [
    ...sharedCards(dataset, reference),
    ...observationCards(dataset, reference.day),
    // A number: the FITS Standard reserves the keyword (section 8.3); the text of the convention is in table SOURCE.
    ...(equinoxes.size === 1 && !Number.isNaN(equinox) ? [card("EQUINOX", real(equinox!))] : []),
    card("WEIGHTYP", "NORMAL", "weights go with the inverse of the variance"),
    card("SORT", ""),
    card("NMATRIX", 1),
    card(`TMATX${columns.length}`, true, "this column holds the matrix"),
    card("MAXIS", axes.length),
    ...axes.flatMap(([type, length, value, step], i) => [
      card(`MAXIS${i + 1}`, length),
      card(`CTYPE${i + 1}`, type),
      card(`CDELT${i + 1}`, real(step)),
      card(`CRPIX${i + 1}`, real(1)),
      card(`CRVAL${i + 1}`, real(value)),
    ]),
  ];
}
