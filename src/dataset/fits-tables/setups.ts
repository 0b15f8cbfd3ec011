/** Frequencies: the FREQ axis, and the frequency table's sub-bands around it. */
import type { Setup } from "../dataset.ts";
import type { Cursor } from "../fits/byte-source.ts";
import type { Hdu } from "../fits/hdus.ts";
import type { Header } from "../fits/header.ts";
import { type Column, findColumn, requireColumn, tableLayout } from "../fits/table-layout.ts";
import { readTable, type Table } from "../fits/table-rows.ts";
import type { Notes } from "../notes.ts";
import { type ArrayAxis, axisValue, type NamedAxes } from "./axes.ts";
import type { Words } from "./words.ts";

/** Above any radio or submillimetre band: 30 um. */
const HIGHEST_FREQUENCY = 1e13;
/** Channel centres of all setups that are held: 128 MB. */
const MOST_FREQUENCIES = 1 << 24;
/** Steps that differ by less are the same number in single precision. */
const SAME_STEP = 1e-3;

/** The axes of the rows' array, and the header that gives them. */
export interface Spectrum extends Pick<NamedAxes, "frequency" | "subband"> {
  readonly header: Header;
}

/** One sub-band as the frequency table has it. */
interface Subband {
  /** Hz from the FREQ axis */
  readonly offset: number;
  /** CH WIDTH and TOTAL BANDWIDTH, Hz; NaN when missing */
  readonly width: number;
  readonly bandwidth: number;
  /** SIDEBAND; NaN when missing */
  readonly sideband: number;
}

/**
 * @param reference Hz, CRVAL of the FREQ axis
 * @throws InputError when the frequency table does not go with the axes
 */
export async function readSetups(
  cursor: Cursor,
  hdu: Hdu | undefined,
  spectrum: Spectrum,
  reference: number,
  words: Words,
  notes: Notes,
): Promise<Setup[]> {
  const { frequency: axis, subband } = spectrum;
  const rows =
    hdu === undefined
      ? [headerSetup(spectrum, words, notes)]
      : await readTableRows(cursor, hdu, spectrum, words, notes);
  if (rows.length * subband.length * axis.length > MOST_FREQUENCIES) {
    throw spectrum.header.error(
      `${rows.length} frequency setups of ${subband.length} sub-bands of ${axis.length} channels: expected at most ` +
        `${MOST_FREQUENCIES} channels in all`,
    );
  }
  noteDisagreements(rows[0]!.subbands, axis, notes);
  const setups = rows.map(({ id, subbands }) => setupOf(id, subbands, { ...axis, value: reference }));
  noteImpossible(setups, notes);
  return setups;
}

/** The FREQ axis alone: enough for one sub-band. */
function headerSetup(
  { header, subband }: Spectrum,
  words: Words,
  notes: Notes,
): { id: number; subbands: Subband[] } {
  if (subband.length > 1) {
    throw header.error(
      `${subband.length} sub-bands (${words.subbandAxis}) and no ${words.frequencyTable}: expected one with their ` +
        "frequencies",
      subband.lengthKey,
    );
  }
  notes.note("missing-frequency-table", `no ${words.frequencyTable}: frequencies are those of the header`);
  const unsaid = Number.NaN;
  return { id: 1, subbands: [{ offset: 0, width: unsaid, bandwidth: unsaid, sideband: unsaid }] };
}

async function readTableRows(
  cursor: Cursor,
  hdu: Hdu,
  spectrum: Spectrum,
  words: Words,
  notes: Notes,
): Promise<{ id: number; subbands: Subband[] }[]> {
  const table = await readTable(cursor, tableLayout(hdu));
  if (table.rows === 0) throw hdu.header.error("the frequency table has no rows", "NAXIS2");
  const id = findColumn(table.layout, "FRQSEL", "FREQID");
  const offset = requireColumn(table.layout, "IF FREQ", "IF_FREQ", "BANDFREQ");
  const width = findColumn(table.layout, "CH WIDTH", "CH_WIDTH");
  const bandwidth = findColumn(table.layout, "TOTAL BANDWIDTH", "TOTAL_BANDWIDTH");
  const sideband = findColumn(table.layout, "SIDEBAND");
  const expected = spectrum.subband.length;
  const rows = new Map<number, Subband[]>();
  for (let row = 0; row < table.rows; row++) {
    const found = table.count(row, offset);
    if (found < expected) {
      throw hdu.header.error(
        `row ${row + 1} gives ${found} sub-bands, the ${words.rows} have ${expected}: expected as many`,
      );
    }
    if (found > expected && row === 0) {
      const text = `the frequency table gives ${found} sub-bands, the ${words.rows} have ${expected}: the first ones are used`;
      notes.fault("subbands-disagree", text);
    }
    const number = id === undefined ? row + 1 : table.number(row, id);
    if (rows.has(number)) {
      const text = `the frequency table has ${id?.name ?? "row"} ${number} more than once: the first counts`;
      notes.fault("setup-twice", text);
      continue;
    }
    const get = (column: Column | undefined, k: number) => valueAt(table, row, column, k);
    rows.set(
      number,
      Array.from({ length: expected }, (_, k) => ({
        offset: get(offset, k),
        width: get(width, k),
        bandwidth: get(bandwidth, k),
        sideband: get(sideband, k),
      })),
    );
  }
  return [...rows].map(([number, subbands]) => ({ id: number, subbands }));
}

/** A column of one value for all sub-bands is met; it holds for each. */
function valueAt(table: Table, row: number, column: Column | undefined, k: number): number {
  if (column === undefined) return Number.NaN;
  return table.number(row, column, table.count(row, column) === 1 ? 0 : k);
}

/**
 * nu(channel) = reference + offset + (channel - CRPIX) x |width| x direction. The step's sign may stand in CDELT, in
 * CH WIDTH and in SIDEBAND: frequency falls when any of them says so, and is never turned twice.
 */
function setupOf(id: number, subbands: readonly Subband[], axis: ArrayAxis): Setup {
  const frequencies = new Float64Array(subbands.length * axis.length);
  const channelWidths = new Float64Array(subbands.length);
  subbands.forEach((subband, k) => {
    const width = widthOf(subband, axis);
    const falls = axis.step < 0 || subband.width < 0 || subband.sideband < 0;
    const step = Number.isNaN(width) ? 0 : falls ? -width : width;
    channelWidths[k] = width;
    for (let channel = 0; channel < axis.length; channel++) {
      frequencies[k * axis.length + channel] =
        axisValue({ ...axis, step: 0 }, channel) + subband.offset + (channel + 1 - axis.pixel) * step;
    }
  });
  return { id, frequencies, channelWidths };
}

/** Hz, positive: CH WIDTH, else CDELT, else the sub-band over its channels; NaN when the file has none of them. */
function widthOf({ width, bandwidth }: Subband, axis: ArrayAxis): number {
  if (width !== 0 && Number.isFinite(width)) return Math.abs(width);
  if (axis.step !== 0) return Math.abs(axis.step);
  const share = Math.abs(bandwidth) / axis.length;
  return share > 0 && Number.isFinite(share) ? share : Number.NaN;
}

function noteDisagreements(subbands: readonly Subband[], axis: ArrayAxis, notes: Notes): void {
  const { step } = axis;
  const sized = subbands.filter(({ width }) => width !== 0 && Number.isFinite(width));
  const wider = sized.find(({ width }) => step !== 0 && Math.abs(Math.abs(width / step) - 1) > SAME_STEP);
  if (wider !== undefined) {
    const text =
      `the channel width is ${Math.abs(step)} Hz by CDELT${axis.number} and ${Math.abs(wider.width)} Hz by the ` +
      "frequency table, which counts";
    // With one channel CDELT is often the bandwidth of the whole observation.
    if (axis.length === 1) notes.note("channel-width-disagrees", text);
    else notes.fault("channel-width-disagrees", text);
  }
  if (axis.length === 1) return;
  const directionText = ({ width, sideband }: Subband) =>
    `the direction of frequency differs: CDELT${axis.number} ${signText(step)}, CH WIDTH ${signText(width)}, ` +
    `SIDEBAND ${signText(sideband)}; channels are taken to fall in frequency`;
  const turned = sized.find(({ width }) => step * width < 0);
  const unsaid = sized.find(({ width, sideband }) => Math.min(step, width) < 0 && sideband > 0);
  if (turned !== undefined) notes.fault("frequency-order-disagrees", directionText(turned));
  // Writers that give the steps their sign often leave SIDEBAND at 1.
  else if (unsaid !== undefined) notes.note("frequency-order-disagrees", directionText(unsaid));
}

function signText(value: number): string {
  return value > 0 ? "positive" : value < 0 ? "negative" : "missing";
}

function noteImpossible(setups: readonly Setup[], notes: Notes): void {
  for (const { id, frequencies, channelWidths } of setups) {
    const bad = frequencies.find((hertz) => !(hertz > 0 && hertz <= HIGHEST_FREQUENCY));
    if (bad !== undefined) {
      const text = `frequency setup ${id} has a channel at ${bad} Hz: expected more than 0 and at most ${HIGHEST_FREQUENCY}`;
      notes.fault("impossible-frequency", text);
    }
    if (channelWidths.some((width) => Number.isNaN(width))) {
      const text = `frequency setup ${id} has no channel width: neither CDELT nor the frequency table gives one`;
      notes.fault("missing-channel-width", text);
    }
  }
}
